"""The PDF carries both markers in one packet, its attachments once, and the same bytes twice."""

import xml.etree.ElementTree as ET
from pathlib import Path

import pypdf
import pytest

from rca.report.pdf import Attached, write_pdf

PAGE = '<html lang="en"><head><title>x</title></head><body><h1>T</h1><p>x</p></body></html>'
PDFA = "{http://www.aiim.org/pdfa/ns/id/}"
PDFUA = "{http://www.aiim.org/pdfua/ns/id/}"


@pytest.mark.pdf
@pytest.mark.outside_value(source="ISO 19005-3 (PDF/A-3) and ISO 14289-1 (PDF/UA-1), from memory")
def test_both_markers_attachments_and_bytes(tmp_path: Path) -> None:
    attached = [
        Attached(name="results.json", content=b"{}", description="results", relation="Data")
    ]
    one, two = tmp_path / "one.pdf", tmp_path / "two.pdf"
    write_pdf(PAGE, tmp_path, one, attached)
    write_pdf(PAGE, tmp_path, two, attached)
    assert one.read_bytes() == two.read_bytes()
    root = pypdf.PdfReader(one, strict=True).trailer["/Root"]
    assert [a.get_object()["/AFRelationship"] for a in root["/AF"]] == ["/Data"]
    assert root["/OutputIntents"][0]["/S"] == "/GTS_PDFA1"
    assert root["/MarkInfo"]["/Marked"]
    assert root["/ViewerPreferences"]["/DisplayDocTitle"]
    packet = root["/Metadata"].get_data()
    tree = ET.fromstring(packet[packet.index(b"<x:xmpmeta") : packet.index(b"<?xpacket end")])
    words = {e.tag for e in tree.iter()} | {a for e in tree.iter() for a in e.attrib}
    assert f"{PDFA}part" in words
    assert f"{PDFUA}part" in words
