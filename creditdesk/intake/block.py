"""A block of amounts as a spreadsheet puts it on the clipboard."""

from dataclasses import dataclass

from creditdesk.base.errors import UserError
from creditdesk.intake.amounts import Amount, Verdict, decide_convention, parse_amount
from creditdesk.intake.numerals import DecimalMark


@dataclass(frozen=True, slots=True)
class Placed:
    """Hold one amount with its row and column within the block."""

    row: int
    column: int
    amount: Amount


def read_block(text: str, decimal: DecimalMark, unit: int, size: tuple[int, int]) -> tuple[Placed, ...]:
    """Read cells parted by tabs and lines; rows and columns must fit into ``size``.

    The decimal mark is decided by the block itself; ``decimal`` counts only where nothing in the block settles it.
    Raises UserError ``block`` with every cell that is no amount, or where the block is empty or too large.
    """
    rows = [line.split("\t") for line in text.replace("\r\n", "\n").rstrip("\n").split("\n")]
    _refuse_size(rows, size)
    convention = decide_convention(cell for row in rows for cell in row)
    if convention.verdict is Verdict.CONFLICTING:
        raise UserError("block", f"Pasted block: decimal marks differ: {', '.join(convention.evidence[:4])}.")
    mark = convention.decimal or decimal
    placed: list[Placed] = []
    faults: list[str] = []
    for number, row in enumerate(rows):
        for column, cell in enumerate(row):
            try:
                placed.append(Placed(number, column, parse_amount(cell, mark, unit)))
            except UserError as error:
                faults += [f"Pasted row {number + 1}, column {column + 1}: {fault}" for fault in error.faults]
    if faults:
        raise UserError("block", faults)
    return tuple(placed)


def _refuse_size(rows: list[list[str]], size: tuple[int, int]) -> None:
    height, width = len(rows), max(len(row) for row in rows)
    if not any(cell.strip() for row in rows for cell in row):
        raise UserError("block", "Pasted block: there is nothing to paste.")
    if height > size[0] or width > size[1]:
        found = f"{height} {'row' if height == 1 else 'rows'} by {width} {'column' if width == 1 else 'columns'}"
        raise UserError("block", f"Pasted block: found {found}; from this cell on {size[0]} by {size[1]} fit.")
