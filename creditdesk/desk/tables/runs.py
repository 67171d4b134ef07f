"""Which rows of a table come and go together, so that a table need not be laid out anew; no Qt."""

from collections.abc import Collection, Hashable, Iterator, Sequence


def runs(rows: Sequence[Hashable], chosen: Collection[Hashable]) -> Iterator[tuple[int, int]]:
    """Yield first and last number of each run of chosen rows."""
    first = -1
    for number in range(len(rows) + 1):
        if number < len(rows) and rows[number] in chosen:
            first = number if first < 0 else first
        elif first >= 0:
            yield first, number - 1
            first = -1
