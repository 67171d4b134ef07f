"""Say which functions and files of the package are larger than the house allows.

Counted are the lines that hold statements, without docstrings, blanks and comments: a statement over three lines counts
three. Functions: median at most 10, nine in ten at most 30, none over 60. Files: median at most 150, none over 400.
"""

import ast
import io
import sys
import tokenize
from dataclasses import dataclass
from pathlib import Path
from statistics import median

FUNCTION_MEDIAN, FUNCTION_NINE_IN_TEN, FUNCTION_MOST = 10, 30, 60
FILE_MEDIAN, FILE_MOST = 150, 400
PARAMETERS_MOST = 6
SILENT = {
    tokenize.COMMENT,
    tokenize.NL,
    tokenize.NEWLINE,
    tokenize.INDENT,
    tokenize.DEDENT,
    tokenize.ENCODING,
    tokenize.ENDMARKER,
}
Function = ast.FunctionDef | ast.AsyncFunctionDef


@dataclass(frozen=True, slots=True)
class Measured:
    """Hold the size of one function or file: counted lines, and where it stands."""

    place: str
    lines: int
    parameters: int = 0


def statement_lines(source: str) -> set[int]:
    """Number the lines that hold a part of a statement that is no docstring."""
    lines: set[int] = set()
    for token in tokenize.generate_tokens(io.StringIO(source).readline):
        if token.type not in SILENT:
            lines.update(range(token.start[0], token.end[0] + 1))
    return lines - _docstring_lines(ast.parse(source))


def _docstring_lines(tree: ast.AST) -> set[int]:
    lines: set[int] = set()
    for node in ast.walk(tree):
        if isinstance(node, ast.Module | ast.ClassDef | Function) and ast.get_docstring(node, clean=False) is not None:
            lines.update(range(node.body[0].lineno, (node.body[0].end_lineno or 0) + 1))
    return lines


def measure(source: str, name: str) -> tuple[Measured, list[Measured]]:
    """Measure one file and each function in it, decorators and nested functions included."""
    lines = statement_lines(source)
    functions = [
        Measured(f"{name}:{node.lineno} {node.name}", len(lines & _span(node)), _parameters(node))
        for node in ast.walk(ast.parse(source))
        if isinstance(node, Function)
    ]
    return Measured(name, len(lines)), functions


def _span(node: Function) -> set[int]:
    first = min([node.lineno, *(decorator.lineno for decorator in node.decorator_list)])
    return set(range(first, (node.end_lineno or node.lineno) + 1))


def _parameters(node: Function) -> int:
    given = node.args
    named = [*given.posonlyargs, *given.args, *given.kwonlyargs, *filter(None, (given.vararg, given.kwarg))]
    return len([one for one in named if one.arg not in {"self", "cls"}])


def faults(files: list[Measured], functions: list[Measured]) -> list[str]:
    """List in sentences what is too large; empty when all is within bounds."""
    found = [
        f"{one.place}: {one.lines} lines, at most {FUNCTION_MOST}" for one in functions if one.lines > FUNCTION_MOST
    ]
    found += [f"{one.place}: {one.lines} lines, at most {FILE_MOST}" for one in files if one.lines > FILE_MOST]
    found += [
        f"{one.place}: {one.parameters} parameters, at most {PARAMETERS_MOST}"
        for one in functions
        if one.parameters > PARAMETERS_MOST
    ]
    for what, value, bound in _middles(files, functions):
        if value > bound:
            found.append(f"{what}: {value:g} lines, at most {bound}")
    return found


def _middles(files: list[Measured], functions: list[Measured]) -> list[tuple[str, float, int]]:
    file_lines = [one.lines for one in files] or [0]
    lines = sorted(one.lines for one in functions) or [0]
    return [
        ("function median", median(lines), FUNCTION_MEDIAN),
        ("nine functions in ten", lines[min(len(lines) - 1, int(0.9 * len(lines)))], FUNCTION_NINE_IN_TEN),
        ("file median", median(file_lines), FILE_MEDIAN),
    ]


def measure_tree(folder: Path) -> tuple[list[Measured], list[Measured]]:
    """Measure every Python file below a folder."""
    files: list[Measured] = []
    functions: list[Measured] = []
    for path in sorted(folder.rglob("*.py")):
        file, inside = measure(path.read_text(encoding="utf-8"), path.relative_to(folder.parent).as_posix())
        files.append(file)
        functions += inside
    return files, functions


def main(folder: Path) -> int:
    """Print what is too large and the sizes reached; end with 1 where anything is too large."""
    files, functions = measure_tree(folder)
    if not files:
        print(f"no Python file in {folder}")
        return 1
    found = faults(files, functions)
    for fault in found:
        print(fault)
    print(f"{len(files)} files, {len(functions)} functions")
    for what, value, bound in _middles(files, functions):
        print(f"  {what}: {value:g} (at most {bound})")
    print(f"  longest function: {max((one.lines for one in functions), default=0)} (at most {FUNCTION_MOST})")
    print(f"  longest file: {max(one.lines for one in files)} (at most {FILE_MOST})")
    return 1 if found else 0


if __name__ == "__main__":
    sys.exit(main(Path(sys.argv[1]) if len(sys.argv) > 1 else Path(__file__).resolve().parent.parent / "creditdesk"))
