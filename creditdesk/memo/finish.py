"""The one pass that turns reportlab's pages into the unsigned memo: tags, metadata, colour, attachments, fields.

Equal input gives equal bytes: dates come from the caller, identifiers from the content.
"""

from collections.abc import Sequence
from datetime import date
from io import BytesIO
from xml.sax.saxutils import escape

import pikepdf
from pikepdf import Array, Dictionary, Name

from creditdesk import __version__
from creditdesk.base.errors import BugError
from creditdesk.memo.attach import Attachment, embed, pdf_date
from creditdesk.memo.srgb import srgb_profile
from creditdesk.memo.structure import Mark, Node, SignatureField, Structure

PRODUCER = f"creditdesk {__version__}"
_PDF_VERSION = "1.7"  # ISO 19005-3 is written for PDF 1.7
_PRINTED_AND_LOCKED = 4 | 128  # annotation flags, ISO 32000-1, 12.5.3
_SIGNATURES_EXIST_APPEND_ONLY = 3  # ISO 32000-1, 12.7.2
_UNIVERSAL_ACCESS = '<pdfuaid:part xmlns:pdfuaid="http://www.aiim.org/pdfua/ns/id/">1</pdfuaid:part>'


def finish(
    pdf_bytes: bytes,
    structure: Structure,
    *,
    title: str,
    language: str,
    written_on: date,
    attachments: Sequence[Attachment] = (),
) -> bytes:
    """Return the unsigned memo: tagged, of PDF/A-3B form, with its attachments and empty signature fields.

    ``structure`` is what was gathered while ``pdf_bytes`` were drawn; ``language`` is a tag such as ``en-GB``; all
    dates in the file are ``written_on``, midnight UTC.
    """
    with pikepdf.open(BytesIO(pdf_bytes)) as pdf:
        for page in pdf.pages:
            if "/Trans" in page.obj:  # reportlab's empty page transition, which PDF/A does not know
                del page.obj.Trans
            page.obj.Tabs = Name.S
        _refuse_fonts_left_outside(pdf)
        _Tree(pdf).write(structure)
        pdf.Root.Lang = language
        pdf.Root.ViewerPreferences = Dictionary(DisplayDocTitle=True)
        _write_metadata(pdf, title, written_on)
        _write_output_intent(pdf)
        embed(pdf, attachments, written_on)
        return _saved(pdf)


def claim_universal_access(pdf_bytes: bytes) -> bytes:
    """Return a copy that declares itself PDF/UA-1; the memo makes no such claim without a person's check."""
    with pikepdf.open(BytesIO(pdf_bytes)) as pdf:
        packet = pdf.Root.Metadata.read_bytes().decode("utf-8")
        mark = "</rdf:Description>"
        _write_metadata_packet(pdf, packet.replace(mark, _UNIVERSAL_ACCESS + mark, 1))
        return _saved(pdf)


def _saved(pdf: pikepdf.Pdf) -> bytes:
    target = BytesIO()
    pdf.save(
        target,
        deterministic_id=True,
        force_version=_PDF_VERSION,
        object_stream_mode=pikepdf.ObjectStreamMode.disable,
        fix_metadata_version=False,
    )
    return target.getvalue()


class _Tree:
    """Write the structure tree; ``Nums`` of the parent tree fill up on the way."""

    def __init__(self, pdf: pikepdf.Pdf) -> None:
        self._pdf = pdf
        self._pages = [page.obj for page in pdf.pages]
        self._owners: list[dict[int, pikepdf.Object]] = [{} for _ in self._pages]
        self._widgets: list[tuple[pikepdf.Object, pikepdf.Object]] = []

    def write(self, structure: Structure) -> None:
        root = self._pdf.make_indirect(Dictionary(Type=Name.StructTreeRoot))
        root.K = self._element(structure.document, root)
        root.ParentTree = self._pdf.make_indirect(Dictionary(Nums=self._parent_numbers()))
        root.ParentTreeNextKey = len(self._pages) + len(self._widgets)
        self._pdf.Root.StructTreeRoot = root
        self._pdf.Root.MarkInfo = Dictionary(Marked=True)
        self._write_form()

    def _element(self, node: Node, parent: pikepdf.Object) -> pikepdf.Object:
        written = self._pdf.make_indirect(Dictionary(Type=Name.StructElem, S=Name("/" + node.element.role), P=parent))
        if node.element.alternative:
            written.Alt = node.element.alternative
        attributes = _attributes(node)
        if attributes is not None:
            written.A = attributes
        marks = [kid for kid in node.kids if isinstance(kid, Mark)]
        if marks:
            written.Pg = self._pages[marks[0].page]
        kids = [self._kid(kid, written, marks[0].page if marks else None) for kid in node.kids]
        if kids:  # one kid stands without an array: so a signature field is found again after it was filled in
            written.K = Array(kids) if len(kids) > 1 else kids[0]
        return written

    def _kid(
        self, kid: Node | Mark | SignatureField, parent: pikepdf.Object, usual_page: int | None
    ) -> pikepdf.Object | int:
        if isinstance(kid, Node):
            return self._element(kid, parent)
        if isinstance(kid, SignatureField):
            return self._field(kid, parent)
        self._owners[kid.page][kid.number] = parent
        if kid.page == usual_page:
            return kid.number
        return Dictionary(Type=Name.MCR, Pg=self._pages[kid.page], MCID=kid.number)

    def _field(self, field: SignatureField, parent: pikepdf.Object) -> pikepdf.Object:
        if field.page != 0 or field.name in [str(widget.T) for widget, _ in self._widgets]:
            raise BugError(f"Signature field {field.name!r} must stand once, on the first page.")
        widget = _widget(self._pdf, field, self._pages[0])
        widget.StructParent = len(self._pages) + len(self._widgets)
        self._widgets.append((widget, parent))
        return Dictionary(Type=Name.OBJR, Obj=widget, Pg=self._pages[0])

    def _parent_numbers(self) -> Array:
        numbers = Array()
        for index, (page, owners) in enumerate(zip(self._pages, self._owners, strict=True)):
            page.StructParents = index
            numbers.append(index)
            numbers.append(self._pdf.make_indirect(Array([owners[number] for number in range(len(owners))])))
        for widget, parent in self._widgets:
            numbers.append(int(widget.StructParent))
            numbers.append(parent)
        return numbers

    def _write_form(self) -> None:
        if not self._widgets:
            return
        widgets = [widget for widget, _ in self._widgets]
        self._pages[0].Annots = Array(widgets)
        self._pdf.Root.AcroForm = self._pdf.make_indirect(
            Dictionary(Fields=Array(widgets), SigFlags=_SIGNATURES_EXIST_APPEND_ONLY)
        )


def _refuse_fonts_left_outside(pdf: pikepdf.Pdf) -> None:
    """See that every font of the pages travels in the file: reportlab falls back to its own names in silence."""
    fonts = {
        str(font.BaseFont): "/FontDescriptor" in font and "/FontFile2" in font.FontDescriptor
        for page in pdf.pages
        for font in page.resources.get("/Font", Dictionary()).values()
    }
    outside = sorted(name for name, embedded in fonts.items() if not embedded)
    if outside:
        raise BugError(f"Fonts are not embedded: {', '.join(outside)}. Has every table its FONT?")


def _widget(pdf: pikepdf.Pdf, field: SignatureField, page: pikepdf.Object) -> pikepdf.Object:
    left, bottom, right, top = field.rectangle
    empty = pdf.make_stream(b"")
    empty.Type, empty.Subtype = Name.XObject, Name.Form
    empty.BBox = Array([0, 0, round(right - left, 3), round(top - bottom, 3)])
    empty.Resources = Dictionary()
    return pdf.make_indirect(
        Dictionary(
            Type=Name.Annot,
            Subtype=Name.Widget,
            FT=Name.Sig,
            T=field.name,
            TU=field.tooltip,
            Rect=Array(field.rectangle),
            F=_PRINTED_AND_LOCKED,
            P=page,
            AP=Dictionary(N=empty),
        )
    )


def _attributes(node: Node) -> Dictionary | None:
    element = node.element
    if node.box is not None:
        return Dictionary(O=Name.Layout, BBox=Array(node.box), Placement=Name.Block)
    table: dict[str, object] = {}
    if element.scope:
        table["/Scope"] = Name("/" + element.scope)
    if element.columns > 1:
        table["/ColSpan"] = element.columns
    if element.rows > 1:
        table["/RowSpan"] = element.rows
    return Dictionary({"/O": Name.Table, **table}) if table else None


def _write_output_intent(pdf: pikepdf.Pdf) -> None:
    profile = pdf.make_stream(srgb_profile())
    profile.N = 3
    intent = Dictionary(
        Type=Name.OutputIntent,
        S=Name.GTS_PDFA1,
        OutputConditionIdentifier="sRGB IEC61966-2.1",
        Info="sRGB IEC61966-2.1",
        DestOutputProfile=profile,
    )
    pdf.Root.OutputIntents = Array([pdf.make_indirect(intent)])


def _write_metadata(pdf: pikepdf.Pdf, title: str, written_on: date) -> None:
    moment = pdf_date(written_on)
    pdf.trailer.Info = pdf.make_indirect(
        Dictionary(Title=title, Producer=PRODUCER, Creator=PRODUCER, CreationDate=moment, ModDate=moment)
    )
    _write_metadata_packet(pdf, _packet(title, written_on))


def _write_metadata_packet(pdf: pikepdf.Pdf, packet: str) -> None:
    stream = pdf.make_stream(packet.encode("utf-8"))
    stream.Type, stream.Subtype = Name.Metadata, Name.XML
    pdf.Root.Metadata = stream


def _packet(title: str, written_on: date) -> str:
    moment = f"{written_on:%Y-%m-%d}T00:00:00Z"
    return f"""<?xpacket begin="\ufeff" id="W5M0MpCehiHzreSzNTczkc9d"?>
<x:xmpmeta xmlns:x="adobe:ns:meta/">
<rdf:RDF xmlns:rdf="http://www.w3.org/1999/02/22-rdf-syntax-ns#">
<rdf:Description rdf:about="" xmlns:dc="http://purl.org/dc/elements/1.1/" xmlns:xmp="http://ns.adobe.com/xap/1.0/"
 xmlns:pdf="http://ns.adobe.com/pdf/1.3/" xmlns:pdfaid="http://www.aiim.org/pdfa/ns/id/">
<pdfaid:part>3</pdfaid:part><pdfaid:conformance>B</pdfaid:conformance>
<dc:format>application/pdf</dc:format>
<dc:title><rdf:Alt><rdf:li xml:lang="x-default">{escape(title)}</rdf:li></rdf:Alt></dc:title>
<xmp:CreateDate>{moment}</xmp:CreateDate><xmp:ModifyDate>{moment}</xmp:ModifyDate>
<xmp:CreatorTool>{escape(PRODUCER)}</xmp:CreatorTool><pdf:Producer>{escape(PRODUCER)}</pdf:Producer>
</rdf:Description>
</rdf:RDF>
</x:xmpmeta>
<?xpacket end="w"?>"""
