"""The last touches to a PDF before it is written, on the objects of the file.

* the mark of PDF/UA-1 beside that of PDF/A-3a, with the extension schema that PDF/A asks for (ISO 19005-3,
  6.6.2.3; ISO 14289-1, clause 5);
* the boxes of the sign-off block become signature fields that are empty and say so by their appearance;
* streams are compressed once, and the cross-reference is a plain table: signatures can be added later, as
  increments, without a reader having to parse one huge object again and again.
"""

import zlib
from typing import Any

from assayfolio.errors import RenderingError

_COMPRESSION = 6
_NOT_SIGNED = "not signed"
_SIZE = 7.2
_GREY = "0.357 0.4 0.427 rg"

_UA_SCHEMA = (
    '<rdf:Description xmlns:pdfuaid="http://www.aiim.org/pdfua/ns/id/" rdf:about="">'
    "<pdfuaid:part>1</pdfuaid:part></rdf:Description>"
    '<rdf:Description xmlns:pdfaExtension="http://www.aiim.org/pdfa/ns/extension/"'
    ' xmlns:pdfaSchema="http://www.aiim.org/pdfa/ns/schema#"'
    ' xmlns:pdfaProperty="http://www.aiim.org/pdfa/ns/property#" rdf:about="">'
    '<pdfaExtension:schemas><rdf:Bag><rdf:li rdf:parseType="Resource">'
    "<pdfaSchema:schema>PDF/UA identification schema</pdfaSchema:schema>"
    "<pdfaSchema:namespaceURI>http://www.aiim.org/pdfua/ns/id/</pdfaSchema:namespaceURI>"
    "<pdfaSchema:prefix>pdfuaid</pdfaSchema:prefix>"
    '<pdfaSchema:property><rdf:Seq><rdf:li rdf:parseType="Resource">'
    "<pdfaProperty:name>part</pdfaProperty:name><pdfaProperty:valueType>Integer</pdfaProperty:valueType>"
    "<pdfaProperty:category>internal</pdfaProperty:category>"
    "<pdfaProperty:description>Part of ISO 14289 that the file follows</pdfaProperty:description>"
    "</rdf:li></rdf:Seq></pdfaSchema:property></rdf:li></rdf:Bag></pdfaExtension:schemas></rdf:Description>"
)


def finish(document: Any, pdf: Any) -> None:
    """Everything in this module, in its order; for the renderer to call just before it writes."""
    mark_accessible(pdf)
    if "AcroForm" in pdf.catalog:
        make_signature_fields(document, pdf)
    name_files_once(pdf)
    write_plainly(pdf)


def _object(pdf: Any, reference: Any) -> Any:
    return pdf.objects[int(reference.split()[0])]


def mark_accessible(pdf: Any) -> None:
    """Add the mark of PDF/UA-1 to the metadata."""
    metadata = _object(pdf, pdf.catalog["Metadata"])
    before = metadata.stream[0]
    after = before.replace(b"</rdf:RDF>", _UA_SCHEMA.encode() + b"</rdf:RDF>")
    if after == before:
        raise RenderingError("the metadata of the PDF are not where they were expected")
    metadata.stream = [after]


def make_signature_fields(document: Any, pdf: Any) -> None:
    """Turn every check box into an empty signature field."""
    form = pdf.catalog["AcroForm"]
    for key in ("NeedAppearances", "DR"):
        form.pop(key, None)
    for reference in form["Fields"]:
        _make_signature_field(document, pdf, _object(pdf, reference))
    for candidate in pdf.objects:
        # One kid stands alone, not in a list: signature validators compare this very reference later.
        if isinstance(candidate, dict) and candidate.get("S") == "/Form" and len(candidate["K"]) == 1:
            candidate["K"] = candidate["K"][0]


def _make_signature_field(document: Any, pdf: Any, widget: Any) -> None:
    import pydyf

    x1, y1, x2, y2 = widget["Rect"]
    left, bottom, right, top = min(x1, x2), min(y1, y2), max(x1, x2), max(y1, y2)
    appearance = _object(pdf, widget["AP"]["N"]["on"])
    font_name, words, width = _words_in_font(document, pdf)
    appearance.stream = [f"BT /{font_name} {_SIZE} Tf {_GREY} 0 3.2 Td <{words}> Tj ET".encode()]
    fonts = pydyf.Dictionary({font_name: _page_fonts(pdf)[font_name]})
    appearance.extra = pydyf.Dictionary(
        {
            "Type": "/XObject",
            "Subtype": "/Form",
            "BBox": pydyf.Array((0, 0, right - left, top - bottom)),
            "Resources": pydyf.Dictionary({"Font": fonts}),
        }
    )
    if width > right - left:
        raise RenderingError("the sign-off fields are too narrow")
    for key in ("AS", "MK", "Border", "V", "DA", "Ff"):
        widget.pop(key, None)
    widget["FT"] = "/Sig"
    widget["F"] = 4  # printed
    widget["Rect"] = pydyf.Array((left, bottom, right, top))
    widget["AP"] = pydyf.Dictionary({"N": appearance.reference})


def _page_fonts(pdf: Any) -> Any:
    resources = _object(pdf, _object(pdf, pdf.page_references[0])["Resources"])
    return _object(pdf, resources["Font"])


def _words_in_font(document: Any, pdf: Any) -> tuple[str, str, float]:
    """The name of the regular font in the file, "not signed" in its glyphs, and how wide that is."""
    available = _page_fonts(pdf)
    for font in document.fonts.values():
        if font.hash not in available or font.style or int(font.weight) != 400:
            continue
        glyph_of = {text: glyph for glyph, text in font.to_unicode.items()}
        if all(character in glyph_of for character in _NOT_SIGNED):
            glyphs = [glyph_of[character] for character in _NOT_SIGNED]
            width = sum(font.widths[glyph] for glyph in glyphs) * _SIZE / 1000
            return font.hash, "".join(f"{glyph:04x}" for glyph in glyphs), width
    raise RenderingError("the words for an empty signature field are not in the report's font")


def name_files_once(pdf: Any) -> None:
    """List every attached file once among the associated files, in the order of their names."""
    import pydyf

    if "AF" in pdf.catalog:
        pdf.catalog["AF"] = pydyf.Array(dict.fromkeys(pdf.catalog["AF"]))


def write_plainly(pdf: Any) -> None:
    """Compress every stream now, and have the file written with a plain cross-reference table."""
    for candidate in pdf.objects:
        if getattr(candidate, "compress", False):
            raw = b"\n".join(_bytes(part) for part in candidate.stream)
            candidate.stream = [zlib.compress(raw, _COMPRESSION)]
            candidate.extra["Filter"] = "/FlateDecode"
            candidate.compress = False
    whole = type(pdf).write

    def write(output: Any, version: Any = b"1.7", identifier: Any = False, compress: bool = False) -> None:  # noqa: ARG001
        whole(pdf, output, version, identifier, compress=False)

    pdf.write = write


def _bytes(part: Any) -> bytes:
    return part if isinstance(part, bytes) else getattr(part, "data", None) or str(part).encode("latin-1")
