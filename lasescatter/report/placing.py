"""Puts the figures, still vectors, into the pages, and writes the outline and the document's dates."""

from __future__ import annotations

from datetime import datetime
from io import BytesIO
from typing import TYPE_CHECKING, cast

from lasescatter.report.page_frame import Pages, Place

if TYPE_CHECKING:
    from pypdf import PageObject, PdfWriter


def assembled(pages: Pages, figures: bytes, made_at: datetime) -> bytes:
    """The finished document.

    Parameters
    ----------
    pages : Pages
        The document without its figures, and where they and the sections lie.
    figures : bytes
        A document with one figure per page, in the order of their places.
    made_at : datetime
        Becomes the creation and modification date.
    """
    from pypdf import PdfReader, PdfWriter
    from pypdf.generic import Fit

    writer = PdfWriter(clone_from=PdfReader(BytesIO(pages.data)))
    for place, drawn in zip(pages.figures, PdfReader(BytesIO(figures)).pages, strict=True):
        _place(writer, place, drawn)
    for place in pages.sections:
        writer.add_outline_item(title=place.name, page_number=place.page, fit=Fit.xyz(left=place.x, top=place.y))
    stamp = _pdf_date(made_at)
    writer.add_metadata({"/Producer": "lasescatter", "/CreationDate": stamp, "/ModDate": stamp})
    target = BytesIO()
    writer.write(target)
    return target.getvalue()


def _place(writer: PdfWriter, place: Place, drawn: PageObject) -> None:
    """Put a drawn page on a page of the report as a form, so that neither page's content is taken apart."""
    from pypdf.generic import ArrayObject, DecodedStreamObject, DictionaryObject, NameObject

    form = DecodedStreamObject()
    contents = drawn.get_contents()
    form.set_data(contents.get_data() if contents is not None else b"")
    form[NameObject("/Type")] = NameObject("/XObject")
    form[NameObject("/Subtype")] = NameObject("/Form")
    form[NameObject("/BBox")] = drawn.mediabox.clone(writer)
    form[NameObject("/Resources")] = cast(DictionaryObject, drawn["/Resources"].get_object()).clone(writer)
    name = NameObject(f"/Figure-{place.name}")

    page = writer.pages[place.page]
    resources = cast(DictionaryObject, page["/Resources"].get_object())
    # Pages may share their resources; this one gets its own.
    own = DictionaryObject(resources)
    forms = DictionaryObject(cast(DictionaryObject, own.get("/XObject", DictionaryObject()).get_object()))
    forms[name] = writer._add_object(form.flate_encode())
    own[NameObject("/XObject")] = forms
    page[NameObject("/Resources")] = own
    call = DecodedStreamObject()
    call.set_data(f"\nq 1 0 0 1 {place.x:.3f} {place.y:.3f} cm {name} Do Q\n".encode("ascii"))
    before = page.raw_get("/Contents")
    streams = list(before) if isinstance(before, ArrayObject) else [before]
    page[NameObject("/Contents")] = ArrayObject([*streams, writer._add_object(call)])


def _pdf_date(moment: datetime) -> str:
    """ISO 32000-1, 7.9.4."""
    text = moment.strftime("D:%Y%m%d%H%M%S")
    offset = moment.strftime("%z")
    if not offset:
        return text
    if moment.utcoffset() is not None and not moment.utcoffset():
        return text + "Z"
    return f"{text}{offset[:3]}'{offset[3:5]}'"
