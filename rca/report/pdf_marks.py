"""What PDF/A-3a and PDF/UA-1 ask for and the renderer leaves out, added before writing.

Works on the renderer's objects after it has laid out every page. Clause numbers are those of
ISO 19005-3:2012 and ISO 14289-1:2014.
"""

from collections.abc import Iterator
from typing import Any

from rca.base.errors import RenderError

UA_NAMESPACE = "http://www.aiim.org/pdfua/ns/id/"
# ISO 19005-3, 6.6.2.3: a property that PDF/A does not know must be described in the packet.
UA_MARK = f"""
<rdf:Description rdf:about="" xmlns:pdfuaid="{UA_NAMESPACE}"><pdfuaid:part>1</pdfuaid:part>
</rdf:Description>
<rdf:Description rdf:about="" xmlns:pdfaExtension="http://www.aiim.org/pdfa/ns/extension/"
 xmlns:pdfaSchema="http://www.aiim.org/pdfa/ns/schema#"
 xmlns:pdfaProperty="http://www.aiim.org/pdfa/ns/property#">
<pdfaExtension:schemas><rdf:Bag><rdf:li rdf:parseType="Resource">
<pdfaSchema:schema>Identification of PDF/UA</pdfaSchema:schema>
<pdfaSchema:namespaceURI>{UA_NAMESPACE}</pdfaSchema:namespaceURI>
<pdfaSchema:prefix>pdfuaid</pdfaSchema:prefix>
<pdfaSchema:property><rdf:Seq><rdf:li rdf:parseType="Resource">
<pdfaProperty:name>part</pdfaProperty:name>
<pdfaProperty:valueType>Integer</pdfaProperty:valueType>
<pdfaProperty:category>internal</pdfaProperty:category>
<pdfaProperty:description>The part of ISO 14289 this file is made to</pdfaProperty:description>
</rdf:li></rdf:Seq></pdfaSchema:property>
</rdf:li></rdf:Bag></pdfaExtension:schemas></rdf:Description>
""".encode()
CELL_ROWS = {"/THead": "/Column", "/TBody": "/Row", "/TFoot": "/Row", "/Table": "/Row"}


def mark_conformance(document: Any, pdf: Any) -> None:
    """Mend the renderer's objects in place; to be given to it as its finisher.

    Raises RenderError where the renderer left no metadata packet or no tag tree.
    """
    del document
    if "AF" in pdf.catalog:  # the renderer lists each attachment twice
        pdf.catalog["AF"][:] = dict.fromkeys(pdf.catalog["AF"])
    _mark_packet(pdf)
    for one in pdf.objects:  # 6.2.8.1: no image may ask to be smoothed
        if "Interpolate" in (getattr(one, "extra", None) or {}):
            one.extra["Interpolate"] = "false"
    if "StructTreeRoot" not in pdf.catalog:
        raise RenderError("the renderer wrote no tags, so the PDF can't be read aloud")
    _scope_heads(pdf)
    _margins_are_artifacts(pdf)


def _mark_packet(pdf: Any) -> None:
    """The PDF/UA mark with its description; 6.6.2.1: the packet is not compressed."""
    for one in pdf.objects:
        extra = getattr(one, "extra", None) or {}
        if extra.get("Type") == "/Metadata":
            packet = one.stream[0]
            marked = packet.replace(b"</rdf:RDF>", UA_MARK + b"</rdf:RDF>", 1)
            if marked != packet:
                one.stream[0], one.compress = marked, False
                return
    raise RenderError("the renderer wrote no metadata packet, so the PDF can't be marked")


def _scope_heads(pdf: Any) -> None:
    """7.5: say of each head of a table whether it heads a column or a row."""
    for head in _elements(pdf):
        if head["S"] != "/TH":
            continue
        row = _object(pdf, head["P"])
        kinds = {kid["S"] for kid in _kids(pdf, row)}
        part = _object(pdf, row["P"])["S"]
        head["A"]["Scope"] = "/Column" if kinds == {"/TH"} else CELL_ROWS.get(part, "/Row")


def _margins_are_artifacts(pdf: Any) -> None:
    """7.8: running heads and page numbers are pagination, not content to read.

    The renderer marks them as content and leaves their elements outside the tag tree.
    """
    root = _object(pdf, pdf.catalog["StructTreeRoot"])
    reached: set[int] = set()
    waiting = [_object(pdf, reference) for reference in root["K"]]
    while waiting:
        one = waiting.pop()
        reached.add(one.number)
        waiting += _kids(pdf, one)
    parents = _object(pdf, root["ParentTree"])["Nums"]
    by_page: dict[Any, list[Any]] = {
        pdf.page_references[n]: array
        for n, array in zip(parents[::2], parents[1::2], strict=True)
        if isinstance(array, list)
    }
    for one in list(_elements(pdf)):
        if one.number in reached:
            continue
        one.free = "f"
        for mcid in (k for k in one["K"] if isinstance(k, int)):
            by_page[one["Pg"]][mcid] = "null"
            _artifact(pdf, _object(pdf, one["Pg"]), mcid)


def _artifact(pdf: Any, page: Any, mcid: int) -> None:
    """Turn one marked piece of a page into pagination."""
    stream = _object(pdf, page["Contents"]).stream
    for k, part in enumerate(stream):
        if isinstance(part, dict) and part.get("MCID") == mcid and stream[k + 1] == b"BDC":
            del part["MCID"]
            part["Type"] = "/Pagination"
            stream[k - 1] = "/Artifact"
            return
    raise RenderError("a running head of the PDF can't be found on its page")


def _elements(pdf: Any) -> Iterator[Any]:
    for one in pdf.objects:
        kept = hasattr(one, "get") and one.free == "n"  # dictionaries, not streams
        if kept and one.get("Type") == "/StructElem":
            yield one


def _kids(pdf: Any, element: Any) -> list[Any]:
    """The elements right below one; content and link objects are left out."""
    below = [_object(pdf, k) for k in element["K"] if not isinstance(k, int)]
    return [one for one in below if one.get("Type") == "/StructElem"]


def _object(pdf: Any, reference: Any) -> Any:
    return pdf.objects[int(reference.split()[0])]
