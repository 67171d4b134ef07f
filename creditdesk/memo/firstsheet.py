"""Page one on paper: the decision on one page, however long its texts are.

What may be long is cut to its share and printed in full after the page; the curve takes the height that is left.
"""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from functools import partial
from typing import cast

from reportlab.platypus import Flowable, Spacer

from creditdesk.case.standing import Standing
from creditdesk.charts.contributions import contributions_figure, contributions_height
from creditdesk.charts.curve import curve_figure
from creditdesk.charts.style import PAPER
from creditdesk.memo.blocks import MemoContent, Spot
from creditdesk.memo.cutting import cut_to_lines, lines_of
from creditdesk.memo.drawings import chart
from creditdesk.memo.firstpage import NOT_WRITTEN
from creditdesk.memo.firstparts import NAME_WIDTH, columns, key_ratio_table, masthead, signature_boxes
from creditdesk.memo.sheets import heading
from creditdesk.memo.styles import BODY, FOOT_CAUTION, NOTE, SMALL_ITEM, TEXT_HEIGHT, TEXT_WIDTH, marked_up
from creditdesk.memo.tagging import DASH, TaggedParagraph, tagged_list

_LEFT, _GUTTER = 258.0, 22.0
_RIGHT = TEXT_WIDTH - _LEFT - _GUTTER
_FOUND = "spots found"
_CURVE_LEAST, _CURVE_MOST, _CURVE_WITHOUT_ROOM = 118.0, 228.0, 60.0
_MOST_LINES = {"request": 3, "recommendation": 6, "conditions": 6, "weak_spots": 5, _FOUND: 7}
_LEAST_LINES = {"request": 2, "recommendation": 2, "conditions": 2, "weak_spots": 2, _FOUND: 3}
_MOST_ROWS = {"factors": 8, "ratios": 8, "lines a note": 4}
_LEAST_ROWS = {"factors": 3, "ratios": 3, "lines a note": 2}
"""What is taken from only where all texts are cut to their least: rows of tables, lines of each note on the PD."""
_LINES_A_SPOT = 3
_POINTER = " … continued on page 2"


@dataclass(frozen=True, slots=True)
class FirstSheet:
    """Hold page one's flowables, and the keys of the officer's texts that did not fit on it."""

    flowables: tuple[Flowable, ...]
    cut: tuple[str, ...]


def first_sheet(content: MemoContent, standing: Standing) -> FirstSheet:
    """Lay out page one so that it fills one page and never more."""
    shares = _MOST_LINES | _MOST_ROWS
    while True:
        page = _Page(content, standing, shares)
        room = TEXT_HEIGHT - _height([*page.above, *page.below, *page.foot]) - 1
        enough = room >= _CURVE_LEAST or (room >= _CURVE_WITHOUT_ROOM and not _to_spare(shares, _LEAST_LINES))
        if enough or not _take_one(shares):
            break
    height = max(min(room, _CURVE_MOST), _CURVE_WITHOUT_ROOM)
    curve = chart(lambda size: curve_figure(standing, PAPER, size), (TEXT_WIDTH, height), content.curve_words)
    rest = Spacer(1, max(room - height, 0.0))
    return FirstSheet((*page.above, curve, *page.below, rest, *page.foot), tuple(page.cut))


class _Page:
    """Make page one's parts above and below the curve and at its foot, each cut to its share of lines or rows."""

    def __init__(self, content: MemoContent, standing: Standing, shares: Mapping[str, int]) -> None:
        self.cut: list[str] = []
        self._shares = shares
        first = content.first
        request = self._officer("request", "Request.", first.request, NAME_WIDTH - 8)
        head = masthead(first, request, shares["lines a note"])
        self.above: list[Flowable] = [head, Spacer(1, 9), *heading("Where the borrower stands")]
        self.below: list[Flowable] = [
            Spacer(1, 8),
            _why_and_ratios(content, standing, shares),
            Spacer(1, 8),
            *heading("Weak spots"),
            *self._spots(first.spots_found),
            Spacer(1, 2),
            self._officer("weak_spots", "By the officer.", first.weak_spots, TEXT_WIDTH),
            Spacer(1, 6),
            *heading("Recommendation and conditions"),
            self._officer("recommendation", "Recommendation.", first.recommendation, TEXT_WIDTH),
            Spacer(1, 2),
            self._officer("conditions", "Conditions.", first.conditions, TEXT_WIDTH),
            Spacer(1, 8),
        ]
        caution = TaggedParagraph(marked_up(f"▲ {first.caution}"), FOOT_CAUTION)
        self.foot: list[Flowable] = [signature_boxes(TEXT_WIDTH, _GUTTER), Spacer(1, 6), caution]

    def _officer(self, key: str, head: str, text: str, width: float) -> TaggedParagraph:
        """Set an officer's text after its head, cut to its lines; an empty one is said to be missing."""
        if not text:
            return TaggedParagraph(f"<b>{head}</b> <i>{NOT_WRITTEN}</i>", BODY)
        shown, cut = cut_to_lines(partial(_headed, head), text, width, self._shares[key], _POINTER)
        self.cut += [key] if cut else []
        return _headed(head, shown)

    def _spots(self, spots: Sequence[Spot]) -> list[Flowable]:
        """List as many of what was found as fit their lines, and say how many more there are."""
        if not spots:
            return [
                TaggedParagraph("No factor raises the PD above the reference borrower's, no query is open.", SMALL_ITEM)
            ]
        shown: list[str] = []
        used = 0
        for spot in spots:
            text, _ = cut_to_lines(_listed, spot.text, TEXT_WIDTH, _LINES_A_SPOT)
            used += lines_of(_listed(text), TEXT_WIDTH)
            if shown and used > self._shares[_FOUND]:
                break
            shown.append(marked_up(text))
        marks = [spot.mark or DASH for spot in spots[: len(shown)]]
        hidden = len(spots) - len(shown)
        more = f"and {hidden} more: see Findings and Contributions of all factors"
        return [*tagged_list(shown, SMALL_ITEM, marks), *([TaggedParagraph(more, NOTE)] if hidden else [])]


def _why_and_ratios(content: MemoContent, standing: Standing, shares: Mapping[str, int]) -> Flowable:
    """Set the contributions beside the key ratios."""
    most = shares["factors"]
    rows = min(len(standing.factors), most)
    size = (_LEFT, contributions_height(rows, PAPER))
    why = chart(lambda wanted: contributions_figure(standing, PAPER, wanted, most), size, content.contribution_words)
    left = [*heading("Why"), why]
    right = [*heading("Key ratios"), key_ratio_table(content.first, _RIGHT, shares["ratios"])]
    return columns((left, (), right), (_LEFT, _GUTTER, _RIGHT))


def _headed(head: str, text: str) -> TaggedParagraph:
    return TaggedParagraph(f"<b>{head}</b> {marked_up(text)}", BODY)


def _listed(text: str) -> TaggedParagraph:
    (item,) = tagged_list([marked_up(text)], SMALL_ITEM)
    return cast("TaggedParagraph", item)


def _take_one(shares: dict[str, int]) -> bool:
    """Take one from the text, or else from the rows, that has most to spare; False where none has."""
    spare = _to_spare(shares, _LEAST_LINES) or _to_spare(shares, _LEAST_ROWS)
    if spare:
        shares[max(spare, key=lambda name: spare[name])] -= 1
    return bool(spare)


def _to_spare(shares: Mapping[str, int], least: Mapping[str, int]) -> dict[str, int]:
    return {key: shares[key] - number for key, number in least.items() if shares[key] > number}


def _height(flowables: Sequence[Flowable]) -> float:
    """Return what flowables take of the page's height, space before and after included, as a frame counts it."""
    total, above = 0.0, 0.0
    for number, flowable in enumerate(flowables):
        before = flowable.getSpaceBefore() if number else 0.0
        total += max(before - above, 0.0) + flowable.wrap(TEXT_WIDTH, 10_000)[1] + flowable.getSpaceAfter()
        above = flowable.getSpaceAfter()
    return total
