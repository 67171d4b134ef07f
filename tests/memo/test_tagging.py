from collections.abc import Iterator
from dataclasses import dataclass, field
from io import BytesIO

import pikepdf
import pytest
from reportlab.pdfgen.canvas import Canvas
from reportlab.platypus import Flowable, Table

from creditdesk.base.errors import BugError
from creditdesk.house.fontfiles import Face
from creditdesk.memo.structure import Element, Structure
from creditdesk.memo.tagging import TableTags, TaggedDrawing, TaggedParagraph, tagged_list
from tests.memos import BODY, drawn, finished, ratio_table, small_memo, small_story

FONT = ("FONT", (0, 0), (-1, -1), str(Face.SANS), 9)
SHOWS = {"Tj", "TJ", "'", '"', "f", "F", "f*", "S", "s", "B", "b", "B*", "b*", "Do", "sh"}


@dataclass
class Tag:
    role: str
    kids: list["Tag"] = field(default_factory=list)
    marks: int = 0
    attributes: dict[str, object] = field(default_factory=dict)
    alternative: str = ""

    def outline(self) -> str:
        return self.role + (f"({' '.join(kid.outline() for kid in self.kids)})" if self.kids else "")

    def find(self, role: str) -> Iterator["Tag"]:
        for kid in self.kids:
            if kid.role == role:
                yield kid
            yield from kid.find(role)


def read_tag(element: pikepdf.Object) -> Tag:
    tag = Tag(str(element.S)[1:], alternative=str(element.get("/Alt", "")))
    tag.attributes = dict(element.get("/A", pikepdf.Dictionary()).items())
    kids = element.get("/K", pikepdf.Array())
    for kid in kids if isinstance(kids, pikepdf.Array) else [kids]:
        if isinstance(kid, pikepdf.Dictionary) and "/S" in kid:
            tag.kids.append(read_tag(kid))
        else:
            tag.marks += 1
    return tag


def tags_of(pdf_bytes: bytes) -> Tag:
    with pikepdf.open(BytesIO(pdf_bytes)) as pdf:
        return read_tag(pdf.Root.StructTreeRoot.K)


def tags_of_story(*story: Flowable) -> Tag:
    return tags_of(finished(story))


def untagged_operators(page: pikepdf.Page) -> list[str]:
    depth, found = 0, []
    for instruction in pikepdf.parse_content_stream(page):
        operator = str(instruction.operator)
        depth += {"BDC": 1, "BMC": 1, "EMC": -1}.get(operator, 0)
        if operator in SHOWS and depth == 0:
            found.append(operator)
    return found


def test_the_tree_follows_the_page() -> None:
    row = "TR(TH TD TD)"
    assert tags_of(small_memo()).outline() == (
        f"Document(H1 P Figure H2 L(LI(LBody) LI(LBody)) Table(TR(TH TH TH) {row} {row} {row}) Form Form)"
    )


def test_everything_drawn_is_content_or_artifact_and_every_mark_has_its_owner() -> None:
    with pikepdf.open(BytesIO(finished([*small_story(), ratio_table(60)]))) as pdf:
        numbers = list(pdf.Root.StructTreeRoot.ParentTree.Nums)
        owners = {int(key): value for key, value in zip(numbers[::2], numbers[1::2], strict=True)}
        for page in pdf.pages:
            assert untagged_operators(page) == []
            marks = [
                int(instruction.operands[1].MCID)
                for instruction in pikepdf.parse_content_stream(page)
                if str(instruction.operator) == "BDC" and "/MCID" in instruction.operands[1]
            ]
            assert marks == list(range(len(owners[int(page.obj.StructParents)])))
        for widget in pdf.pages[0].Annots:
            assert str(owners[int(widget.StructParent)].S) == "/Form"


def test_a_broken_paragraph_is_one_element() -> None:
    memo = finished([TaggedParagraph("word " * 3000, BODY)])
    with pikepdf.open(BytesIO(memo)) as pdf:
        pages = len(pdf.pages)
    tag = tags_of(memo)
    assert pages > 2
    assert (tag.outline(), tag.kids[0].marks) == ("Document(P)", pages)


def test_a_table_is_read_once_with_its_heads() -> None:
    tag = tags_of_story(ratio_table(100))
    (table,) = tag.find("Table")
    assert len(table.kids) == 101
    assert [kid.attributes["/Scope"] for kid in table.kids[0].kids] == ["/Both", "/Column", "/Column"]
    assert all(row.kids[0].attributes["/Scope"] == "/Row" for row in table.kids[1:])
    assert [kid.role for kid in table.kids[1].kids] == ["TH", "TD", "TD"]


def test_the_repeated_head_is_an_artifact() -> None:
    structure = Structure()
    with pikepdf.open(BytesIO(drawn([ratio_table(100)], structure))) as pdf:
        content = pdf.pages[1].Contents.read_bytes()
    assert content.count(b"/Artifact <</Type /Pagination>> BDC") == 2  # the running head and the table's
    assert b"/TH" in content


def test_a_cell_of_flowables_holds_elements_and_an_empty_head_is_no_head() -> None:
    drawing = TaggedDrawing(lambda canvas, x, y, w, h: canvas.rect(x, y, w, h), 20, 9, "a small rise")
    data = [["", "2025"], [TaggedParagraph("Equity ratio", BODY), [drawing, TaggedParagraph("50 %", BODY)]]]
    tag = tags_of_story(Table(data, style=[FONT], renderCB=TableTags(1, 1)))
    assert tag.outline() == "Document(Table(TR(TD TH) TR(TH(P) TD(Figure P))))"


def test_spans_are_told() -> None:
    data = [["Ratios", "", "Note"], ["a", "b", "c"], ["d", "e", ""]]
    style = [FONT, ("SPAN", (0, 0), (1, 0)), ("SPAN", (2, 1), (2, 2))]
    tag = tags_of_story(Table(data, style=style, renderCB=TableTags(1)))
    (table,) = tag.find("Table")
    assert table.kids[0].kids[0].attributes["/ColSpan"] == 2
    assert table.kids[1].kids[2].attributes["/RowSpan"] == 2
    assert [len(row.kids) for row in table.kids] == [2, 3, 2]


def test_a_figure_has_its_text_and_its_box() -> None:
    (figure,) = tags_of(small_memo()).find("Figure")
    left, bottom, right, top = (float(number) for number in figure.attributes["/BBox"])
    assert figure.alternative == "PD over score, rising from 1 % to 4 %"
    assert (right - left, top - bottom) == pytest.approx((400, 160))


def test_a_list_uses_the_text_font_for_its_marks() -> None:
    with pikepdf.open(BytesIO(finished(tagged_list(["one"], BODY)))) as pdf:
        fonts = {str(font.BaseFont) for font in pdf.pages[0].resources.Font.values()}
    assert fonts == {"/AAAAAA+SourceSansPro-Regular"}


def test_marks_do_not_nest() -> None:
    canvas = Structure().canvas(BytesIO())
    with pytest.raises(BugError, match="P inside H1"), canvas.marked(Element("H1")), canvas.marked(Element("P")):
        pass


def test_inside_an_artifact_marks_are_silent() -> None:
    structure = Structure()
    canvas = structure.canvas(BytesIO())
    with canvas.artifact(), canvas.marked(Element("P")), canvas.artifact():
        pass
    assert structure.document.kids == []


def test_a_second_drawing_pass_starts_the_tree_anew() -> None:
    structure, story = Structure(), small_story()
    drawn(story, structure)
    first = [node.element.role for node in structure.document.kids]
    drawn(story, structure)
    assert [node.element.role for node in structure.document.kids] == first


def test_the_tagged_canvas_is_a_canvas_without_a_date_of_its_own() -> None:
    canvas = Structure().canvas(BytesIO(), invariant=0)
    assert isinstance(canvas, Canvas)
    assert canvas.getpdfdata() == Structure().canvas(BytesIO()).getpdfdata()
