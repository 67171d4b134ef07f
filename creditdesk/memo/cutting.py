"""Texts cut to a number of lines, ending in words that say so."""

from collections.abc import Callable

from creditdesk.memo.tagging import TaggedParagraph

Make = Callable[[str], TaggedParagraph]


def lines_of(paragraph: TaggedParagraph, width: float) -> int:
    """Return how many lines a paragraph takes at ``width`` points."""
    return round(paragraph.wrap(width, 100_000)[1] / paragraph.style.leading)


def cut_to_lines(make: Make, text: str, width: float, lines: int, ending: str = "…") -> tuple[str, bool]:
    """Return the text, or as much of it as leaves room for ``ending`` in ``lines`` lines; and whether it was cut.

    ``make`` sets a text as the paragraph it will be.
    """
    if lines_of(make(text), width) <= lines:
        return text, False
    low, high = 0, len(text)
    while low < high:
        middle = (low + high + 1) // 2
        fits = lines_of(make(_ended(text[:middle], ending)), width) <= lines
        low, high = (middle, high) if fits else (low, middle - 1)
    return _ended(text[:low], ending), True


def _ended(text: str, ending: str) -> str:
    """End a cut text at a word, unless its last word is so long that this would lose much of it."""
    start, space, last = text.rstrip().rpartition(" ")
    return (start if space and len(last) < 30 else text.rstrip()) + ending
