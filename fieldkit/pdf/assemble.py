"""From typeset pages to the file that is sealed: attachments, the two signature fields, PDF/UA's mark.

Both fields are made here, before the first signature, and no other: anyone may sign a free field. The supervisor's
signature locks everything (FieldMDP all, no change after). Each widget sits in a Form structure element, so that the
file stays PDF/UA. The same arguments give the same bytes. Not here: signing (seal.py, countersign.py).
"""

from __future__ import annotations

import datetime as dt
import hashlib
import io
from collections.abc import Sequence
from dataclasses import dataclass

import pikepdf
from pikepdf import Array, Dictionary, Name, String

from fieldkit.pdf.typeset import Box, Pages

SEAL, SUPERVISOR = "Seal", "Supervisor"
#: annotation flags: printed, and neither moved nor changed by a viewer
_PRINTED_AND_LOCKED = 4 | 128


@dataclass(frozen=True)
class Attached:
    """A file inside the PDF. `relationship` is one of PDF's words: Data, Source, Supplement."""

    name: str
    data: bytes
    media: str
    relationship: str
    description: str


@dataclass(frozen=True)
class Field:
    """A signature field to be made: name, tooltip, where it stands, and whether its signature locks the file."""

    name: str
    title: str
    box: Box
    locks: bool


def assemble(pages: Pages, attached: Sequence[Attached], fields: Sequence[Field], made: dt.datetime) -> bytes:
    """The PDF with everything in it that the seal will cover. `made` is the date of the attachments."""
    with pikepdf.open(io.BytesIO(pages.pdf)) as pdf:
        _attach(pdf, attached, made)
        _add_fields(pdf, fields)
        _mark_accessible(pdf)
        out = io.BytesIO()
        # Object streams: without them a later check of the signatures takes five times as long.
        pdf.save(out, object_stream_mode=pikepdf.ObjectStreamMode.generate, deterministic_id=True)
    return out.getvalue()


def _attach(pdf: pikepdf.Pdf, attached: Sequence[Attached], made: dt.datetime) -> None:
    """Name tree and associated files, each file once, by name."""
    date = String(made.astimezone(dt.UTC).strftime("D:%Y%m%d%H%M%SZ"))
    names, associated = Array(), Array()
    for one in sorted(attached, key=lambda a: a.name):
        # The digest is PDF's own and says nothing about trust; the chain of events does.
        check = String(hashlib.md5(one.data, usedforsecurity=False).digest())
        params = Dictionary(Size=len(one.data), CreationDate=date, ModDate=date, CheckSum=check)
        stream = pikepdf.Stream(pdf, one.data)
        stream.Type, stream.Subtype, stream.Params = Name.EmbeddedFile, Name("/" + one.media), params
        spec = Dictionary(
            Type=Name.Filespec,
            F=String(one.name),
            UF=String(one.name),
            Desc=String(one.description),
            AFRelationship=Name("/" + one.relationship),
            EF=Dictionary(F=pdf.make_indirect(stream), UF=pdf.make_indirect(stream)),
        )
        reference = pdf.make_indirect(spec)
        names.extend([String(one.name), reference])
        associated.append(reference)
    if attached:
        if Name.Names not in pdf.Root:
            pdf.Root.Names = Dictionary()
        pdf.Root.Names.EmbeddedFiles = Dictionary(Names=names)
        pdf.Root.AF = associated


def _add_fields(pdf: pikepdf.Pdf, fields: Sequence[Field]) -> None:
    if not fields:
        return
    tree = pdf.Root.StructTreeRoot
    document = tree.K[0]
    numbers = tree.ParentTree.Nums
    following = max((int(numbers[i]) for i in range(0, len(numbers), 2)), default=-1) + 1
    widgets = Array()
    for field in fields:
        widget = pdf.make_indirect(_widget(pdf, field, following))
        page = pdf.pages[field.box.page].obj
        if Name.Annots not in page:
            page.Annots = Array()
        page.Annots.append(widget)
        element = pdf.make_indirect(
            Dictionary(
                Type=Name.StructElem,
                S=Name.Form,
                P=document,
                Pg=page,
                Alt=String(field.title),
                # not in an array: the difference policy knows only this form
                K=Dictionary(Type=Name.OBJR, Obj=widget, Pg=page),
            )
        )
        document.K.append(element)
        numbers.extend([following, element])
        following += 1
        widgets.append(widget)
    tree.ParentTreeNextKey = following
    pdf.Root.AcroForm = pdf.make_indirect(Dictionary(Fields=widgets, SigFlags=3))


def _widget(pdf: pikepdf.Pdf, field: Field, key: int) -> Dictionary:
    box = field.box
    empty = pikepdf.Stream(pdf, b"")
    empty.Type, empty.Subtype = Name.XObject, Name.Form
    empty.BBox = Array([0, 0, round(box.x1 - box.x0, 3), round(box.y1 - box.y0, 3)])
    widget = Dictionary(
        Type=Name.Annot,
        Subtype=Name.Widget,
        FT=Name.Sig,
        T=String(field.name),
        TU=String(field.title),
        F=_PRINTED_AND_LOCKED,
        Rect=Array([box.x0, box.y0, box.x1, box.y1]),
        P=pdf.pages[box.page].obj,
        AP=Dictionary(N=pdf.make_indirect(empty)),
        StructParent=key,
    )
    if field.locks:
        # P 1, no change at all afterwards, counts only beside the lock of all fields.
        widget.Lock = pdf.make_indirect(Dictionary(Type=Name.SigFieldLock, Action=Name.All, P=1))
    return widget


_UA = b"""<rdf:Description rdf:about="" xmlns:pdfuaid="http://www.aiim.org/pdfua/ns/id/" pdfuaid:part="1"/>
<rdf:Description rdf:about="" xmlns:pdfaExtension="http://www.aiim.org/pdfa/ns/extension/"
 xmlns:pdfaSchema="http://www.aiim.org/pdfa/ns/schema#" xmlns:pdfaProperty="http://www.aiim.org/pdfa/ns/property#">
<pdfaExtension:schemas><rdf:Bag><rdf:li rdf:parseType="Resource">
<pdfaSchema:namespaceURI>http://www.aiim.org/pdfua/ns/id/</pdfaSchema:namespaceURI>
<pdfaSchema:prefix>pdfuaid</pdfaSchema:prefix><pdfaSchema:schema>PDF/UA identification</pdfaSchema:schema>
<pdfaSchema:property><rdf:Seq><rdf:li rdf:parseType="Resource"><pdfaProperty:category>internal</pdfaProperty:category>
<pdfaProperty:description>Part of PDF/UA that the file conforms to</pdfaProperty:description>
<pdfaProperty:name>part</pdfaProperty:name><pdfaProperty:valueType>Integer</pdfaProperty:valueType>
</rdf:li></rdf:Seq></pdfaSchema:property></rdf:li></rdf:Bag></pdfaExtension:schemas></rdf:Description>
</rdf:RDF>"""


def _mark_accessible(pdf: pikepdf.Pdf) -> None:
    """Say PDF/UA-1 in the metadata, with the schema that PDF/A asks for beside a word that is not its own."""
    metadata = pdf.Root.Metadata.read_bytes()
    if metadata.count(b"</rdf:RDF>") != 1:
        raise ValueError("the typeset pages' metadata have not the form that is extended here")
    pdf.Root.Metadata.write(metadata.replace(b"</rdf:RDF>", _UA))
