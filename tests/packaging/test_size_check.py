from pathlib import Path

import size_check


def _function(lines: int, name: str = "long_one") -> str:
    return f'def {name}():\n    """Do."""\n' + "    x = 1\n" * (lines - 1)


def test_what_is_counted() -> None:
    source = '"""Say\n\nmore."""\n\n# why\n@cached\ndef f(a,\n      b):\n    """Do."""\n\n    return """one\n\ntwo"""\n'
    file, functions = size_check.measure(source, "f.py")
    assert file.lines == 6  # decorator, two lines of the signature, three of the returned text
    assert [(one.lines, one.parameters) for one in functions] == [(6, 2)]


def test_the_longest_allowed_function_passes_and_one_line_more_is_named() -> None:
    small = [_function(3, f"small_{i}") for i in range(20)]
    for lines, expected in ((60, []), (61, ["f.py:61 long_one: 61 lines, at most 60"])):
        file, functions = size_check.measure("".join(small) + _function(lines), "f.py")
        found = size_check.faults([file], functions)
        assert [fault.split(" ", 1)[1] for fault in found] == [fault.split(" ", 1)[1] for fault in expected]


def test_parameters_and_long_files_are_named() -> None:
    file, functions = size_check.measure("def f(a, b, c, *, d, e, f, g):\n    pass\n" + "x = 1\n" * 400, "f.py")
    found = size_check.faults([file], functions)
    assert any("7 parameters" in fault for fault in found)
    assert any(fault.startswith("f.py: 402 lines") for fault in found)


def test_medians_are_bound_as_well() -> None:
    file, functions = size_check.measure("".join(_function(31, f"f{i}") for i in range(9)), "f.py")
    found = size_check.faults([file], functions)
    assert [fault.split(":")[0] for fault in found] == ["function median", "nine functions in ten", "file median"]


def test_a_planted_fault_in_a_tree_ends_with_one(tmp_path: Path) -> None:
    package = tmp_path / "package"
    package.mkdir()
    (package / "good.py").write_text(_function(5))
    assert size_check.main(package) == 0
    (package / "planted.py").write_text(_function(61))
    assert size_check.main(package) == 1


def test_an_empty_tree_is_no_pass(tmp_path: Path) -> None:
    assert size_check.main(tmp_path) == 1
