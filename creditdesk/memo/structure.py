"""The tags of a document, gathered while reportlab draws it (ISO 32000-1, 14.7 and 14.8).

What is drawn stands either inside a mark of an element or inside an artifact; elements form the tree a reader hears,
in the order of drawing. Marks do not nest; inside an artifact marks are silent, so that a repeated table head is read
once.
"""

from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass, field

from reportlab.pdfgen.canvas import Canvas

from creditdesk.base.errors import BugError
from creditdesk.house.fontfiles import Face
from creditdesk.memo.fonts import register_fonts

Rectangle = tuple[float, float, float, float]


@dataclass(frozen=True, slots=True, eq=False)
class Element:
    """Describe one element: a standard structure type, and what readers need to know of it.

    An element is itself, not its values: the halves of a broken paragraph share one. Without ``parent`` it goes under
    the element that is open when it is first drawn. ``alternative`` is the text read in place of a drawing; ``scope``
    is Column, Row or Both for a table's heads; ``columns`` and ``rows`` are a cell's spans.
    """

    role: str
    parent: "Element | None" = None
    alternative: str = ""
    scope: str = ""
    columns: int = 1
    rows: int = 1


@dataclass(frozen=True, slots=True)
class Mark:
    """Point to one marked stretch of a page's content; ``page`` counts from 0."""

    page: int
    number: int


@dataclass(frozen=True, slots=True)
class SignatureField:
    """Describe one signature field: its name, what is read for it, and its rectangle on ``page``, in points."""

    name: str
    tooltip: str
    page: int
    rectangle: Rectangle


@dataclass(slots=True, eq=False)
class Node:
    """Hold one element's place in the tree; ``box`` is the rectangle of a drawing on its page."""

    element: Element
    kids: "list[Node | Mark | SignatureField]" = field(default_factory=list)
    box: Rectangle | None = None


class Structure:
    """Gather the tags of one document; hand ``structure.canvas`` to reportlab as the canvas maker."""

    def __init__(self) -> None:
        self._start_anew()

    def _start_anew(self) -> None:
        self.document = Node(Element("Document"))
        self._nodes: dict[Element, Node] = {}
        self._open: list[Node] = []
        self._marks_on_page: dict[int, int] = {}

    def canvas(self, *arguments: object, **options: object) -> "TaggedCanvas":
        """Make the canvas of a drawing pass; reportlab may draw a document twice, only the last pass counts.

        The canvas never writes today's date, and starts with an embedded font.
        """
        self._start_anew()
        register_fonts()
        return TaggedCanvas(self, *arguments, **{**options, "invariant": 1, "initialFontName": str(Face.SANS)})

    def knows(self, element: Element) -> bool:
        """Say whether an element was drawn before in this pass."""
        return element in self._nodes

    def node(self, element: Element) -> Node:
        """Return the place of an element in the tree, made on first use."""
        if element not in self._nodes:
            self._nodes[element] = node = Node(element)
            above = self.node(element.parent) if element.parent else self._open[-1] if self._open else self.document
            above.kids.append(node)
        return self._nodes[element]

    def enter(self, element: Element) -> None:
        """Let elements drawn from now on stand under this one, until ``leave``."""
        self._open.append(self.node(element))

    def leave(self) -> None:
        """Close the element opened last."""
        self._open.pop()

    def mark(self, element: Element, page: int) -> Mark:
        """Number a new stretch of content of an element on a page."""
        number = self._marks_on_page.get(page, 0)
        self._marks_on_page[page] = number + 1
        mark = Mark(page, number)
        self.node(element).kids.append(mark)
        return mark


class TaggedCanvas(Canvas):
    """Draw as reportlab's canvas does, and write down what each stretch of drawing is."""

    def __init__(self, structure: Structure, *arguments: object, **options: object) -> None:
        super().__init__(*arguments, **options)  # type: ignore[arg-type]  # passed through as reportlab gave them
        self.structure = structure
        self._stretches: list[str] = []

    def begin(self, element: Element, box: Rectangle | None = None) -> None:
        """Start a stretch of an element's content; ``box`` is a drawing's x, y, width and height, as drawn here."""
        if "artifact" in self._stretches:
            self._stretches.append("silent")
            return
        if self._stretches:
            raise BugError(f"Marked content may not nest: {element.role} inside {self._stretches[-1]}.")
        mark = self.structure.mark(element, self.getPageNumber() - 1)
        if box is not None:
            self.structure.node(element).box = self.on_page(box)
        self.addLiteral(f"/{element.role} <</MCID {mark.number}>> BDC")
        self._stretches.append(element.role)

    def begin_artifact(self, kind: str = "Layout") -> None:
        """Start a stretch that is no content: Layout, Background or Pagination (ISO 32000-1, 14.8.2.2)."""
        inside = bool(self._stretches)
        if inside and self._stretches[-1] not in ("artifact", "silent"):
            raise BugError(f"Marked content may not nest: an artifact inside {self._stretches[-1]}.")
        if not inside:
            self.addLiteral(f"/Artifact <</Type /{kind}>> BDC")
        self._stretches.append("silent" if inside else "artifact")

    def end(self) -> None:
        """End the stretch begun last."""
        if self._stretches.pop() != "silent":
            self.addLiteral("EMC")

    @contextmanager
    def marked(self, element: Element, box: Rectangle | None = None) -> Iterator[None]:
        """Draw a stretch of an element's content."""
        self.begin(element, box)
        yield
        self.end()

    @contextmanager
    def artifact(self, kind: str = "Layout") -> Iterator[None]:
        """Draw what is no content: lines, backgrounds, running heads."""
        self.begin_artifact(kind)
        yield
        self.end()

    def signature_field(self, name: str, tooltip: str, box: Rectangle) -> None:
        """Set a signature field at x, y, width and height, as drawn here, and its element here in the tree."""
        place = SignatureField(name, tooltip, self.getPageNumber() - 1, self.on_page(box))
        self.structure.node(Element("Form")).kids.append(place)

    def on_page(self, box: Rectangle) -> Rectangle:
        """Turn x, y, width and height, as drawn here, into left, bottom, right and top on the page."""
        x, y, width, height = box
        left, bottom = self.absolutePosition(x, y)
        right, top = self.absolutePosition(x + width, y + height)
        return round(left, 3), round(bottom, 3), round(right, 3), round(top, 3)
