"""What a PDF must hold to be kept and read aloud, looked up in the file by another library.

The writer is not asked: pypdf reads the file, ``page`` (where it is installed) validates it against
its rules for PDF/A-3a and PDF/UA-1.
"""

import re
import xml.etree.ElementTree as ET
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pypdf

PDFA = "{http://www.aiim.org/pdfa/ns/id/}"
PDFUA = "{http://www.aiim.org/pdfua/ns/id/}"
RELATIONS = {"/Source", "/Data", "/Alternative", "/Supplement"}


def faults(path: Path) -> list[str]:
    """What is missing, in words; an empty list where nothing is."""
    reader = pypdf.PdfReader(path, strict=True)
    root = reader.trailer["/Root"]
    found = [] if "/Encrypt" not in reader.trailer else ["encrypted"]
    found += [] if root.get("/Lang") else ["no language"]
    found += [] if (reader.metadata or {}).get("/Title") else ["no title"]
    found += [] if root["/MarkInfo"].get("/Marked") else ["not marked as tagged"]
    shows = root["/ViewerPreferences"].get("/DisplayDocTitle")
    found += [] if shows else ["the window shows the file's name"]
    intents = [i.get_object() for i in root.get("/OutputIntents", ())]
    found += [] if any("/DestOutputProfile" in i for i in intents) else ["no output intent"]
    return [*found, *_packet(root), *_attachments(root), *_fonts(reader), *_tags(root)]


def validator_failures(path: Path, profile: str) -> list[str]:
    """The findings of the independent validator; ``profile`` is 3a or ua1."""
    import page

    return [f"{f.rule_id}: {f.message}" for f in page.validate_pdf(path, profile=profile).failures]


def headings(path: Path) -> list[int]:
    """The levels of the headings in the order they are read aloud."""
    root = pypdf.PdfReader(path).trailer["/Root"]
    kinds = [e["/S"] for e in elements(root["/StructTreeRoot"])]
    return [int(k[2]) for k in kinds if re.fullmatch(r"/H[1-6]", k)]


def elements(node: Any) -> Iterator[Any]:
    """The elements of the tag tree in reading order."""
    below = node.get("/K", [])
    for kid in below if isinstance(below, list) else [below]:
        one = kid.get_object()
        if isinstance(one, dict) and "/S" in one:
            yield one
            yield from elements(one)


def _packet(root: Any) -> list[str]:
    stream = root["/Metadata"].get_object()
    text = stream.get_data()
    tree = ET.fromstring(text[text.index(b"<x:xmpmeta") : text.index(b"<?xpacket end")])
    words = {e.tag for e in tree.iter()} | {a for e in tree.iter() for a in e.attrib}
    found = [f"no {w} in the packet" for w in (f"{PDFA}part", f"{PDFUA}part") if w not in words]
    return found + (["the packet is compressed"] if "/Filter" in stream else [])


def _attachments(root: Any) -> list[str]:
    listed = [a.get_object() for a in root.get("/AF", ())]
    return [
        f"{a.get('/UF')}: no relation or no description"
        for a in listed
        if a.get("/AFRelationship") not in RELATIONS or not a.get("/Desc")
    ] + ([] if len({a["/UF"] for a in listed}) == len(listed) else ["an attachment twice"])


def _fonts(reader: pypdf.PdfReader) -> list[str]:
    found = set()
    for page in reader.pages:
        for font in (page["/Resources"].get("/Font") or {}).values():
            one = font.get_object()
            inner = one["/DescendantFonts"][0].get_object() if "/DescendantFonts" in one else one
            described = inner["/FontDescriptor"]
            if not any(f"/FontFile{n}" in described for n in ("", "2", "3")):
                found.add(f"{one['/BaseFont']} is not embedded")
            if "/ToUnicode" not in one:
                found.add(f"{one['/BaseFont']} has no way back to text")
    return sorted(found)


def _tags(root: Any) -> list[str]:
    found = []
    level = 0
    for one in elements(root["/StructTreeRoot"]):
        kind = one["/S"]
        if kind == "/Figure" and not str(one.get("/Alt", "")).strip():
            found.append("a figure without words")
        if kind == "/TH" and one["/A"].get("/Scope") not in ("/Column", "/Row", "/Both"):
            found.append("a table head without scope")
        if re.fullmatch(r"/H[1-6]", kind):
            if int(kind[2]) > level + 1:
                found.append(f"a heading jumps from level {level} to {kind[2]}")
            level = int(kind[2])
    return found
