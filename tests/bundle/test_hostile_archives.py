"""Hostile archives are refused, and nothing is written outside or left behind."""

import stat
import struct
import zipfile
from pathlib import Path

import pytest

from rca.base.errors import ArchiveError
from rca.bundle.names import check_name, check_names
from rca.bundle.unpack import Limits, unpack

BAGIT = "bag/bagit.txt"


def archive(path: Path, members: dict[str, bytes], **attributes: int) -> Path:
    with zipfile.ZipFile(path, "w", zipfile.ZIP_DEFLATED) as made:
        made.writestr(BAGIT, "BagIt-Version: 1.0\n")
        for name, content in members.items():
            member = zipfile.ZipInfo(name)
            member.external_attr = attributes.get("mode", stat.S_IFREG | 0o644) << 16
            member.compress_type = zipfile.ZIP_DEFLATED
            made.writestr(member, content)
    return path


def refused(path: Path, tmp_path: Path, words: str, limits: Limits | None = None) -> None:
    into = tmp_path / "into"
    into.mkdir()
    before = sorted(p.name for p in tmp_path.iterdir())
    with pytest.raises(ArchiveError, match=words):
        unpack(path, into, limits)
    assert list(into.iterdir()) == []
    assert sorted(p.name for p in tmp_path.iterdir()) == before


@pytest.mark.parametrize(
    "name",
    [
        "../evil.txt",
        "bag/../../evil.txt",
        "/etc/cron.d/evil",
        "C:/evil.txt",
        "\\\\server\\share\\evil",
        "bag\\..\\..\\evil.txt",
        "bag/./x",
        "bag//x",
        "bag/NUL",
        "bag/com1.txt",
        "bag/x.",
        "bag/x ",
        "bag/a:stream",
        "bag/line\nend",
        "bag/\x1b[2J",
        "bag/" + "x" * 256,
        "bag/" + "d/" * 600 + "x",
    ],
)
def test_names_that_lead_out_or_that_some_system_can_not_hold(tmp_path: Path, name: str) -> None:
    with pytest.raises(ArchiveError, match="refused"):
        check_name(name)
    refused(archive(tmp_path / "e.zip", {name: b"x"}), tmp_path, "refused")


@pytest.mark.parametrize(
    "names",
    [
        ("bag/x", "bag/x"),
        ("bag/x", "bag/X"),
        ("bag/ä", "bag/a\u0308"),
        ("bag/K", "bag/\u212a"),
        ("bag/a/x", "bag/A/y"),
        ("bag/a", "bag/a/x"),
    ],
)
def test_names_that_are_or_may_be_the_same(names: tuple[str, str]) -> None:
    with pytest.raises(ArchiveError, match="refused"):
        check_names(names)


@pytest.mark.filterwarnings("ignore:Duplicate name")
def test_a_name_told_twice(tmp_path: Path) -> None:
    path = tmp_path / "e.zip"
    with zipfile.ZipFile(path, "w") as made:
        made.writestr(BAGIT, "1")
        made.writestr(BAGIT, "2")
    refused(path, tmp_path, "twice")


@pytest.mark.parametrize("kind", [stat.S_IFLNK, stat.S_IFCHR, stat.S_IFIFO, stat.S_IFSOCK])
def test_links_and_devices(tmp_path: Path, kind: int) -> None:
    path = archive(tmp_path / "e.zip", {"bag/data/x": b"/etc/passwd"}, mode=kind | 0o777)
    refused(path, tmp_path, "link or a device")


def test_ten_gigabytes_of_zeros_are_refused_before_a_byte_is_written(tmp_path: Path) -> None:
    """Zeros told by the archive's index; the bytes behind it are never reached."""
    path = archive(tmp_path / "e.zip", {"bag/zeros": bytes(1 << 20)})
    content = bytearray(path.read_bytes())
    place = content.rindex(b"PK\x01\x02")  # the index entry of the last member (APPNOTE 4.3.12)
    content[place + 24 : place + 28] = struct.pack("<I", 0xFFFFFFF0)
    path.write_bytes(bytes(content))
    refused(path, tmp_path, "grows more than|would grow")


def test_real_zeros_that_shrink_a_thousand_times(tmp_path: Path) -> None:
    refused(archive(tmp_path / "e.zip", {"bag/z": bytes(8 << 20)}), tmp_path, "grows more than")


def test_an_index_that_tells_less_than_there_is(tmp_path: Path) -> None:
    path = archive(tmp_path / "e.zip", {"bag/zeros": bytes(1 << 20)})
    content = bytearray(path.read_bytes())
    place = content.rindex(b"PK\x01\x02")
    content[place + 24 : place + 28] = struct.pack("<I", 100)
    path.write_bytes(bytes(content))
    refused(path, tmp_path, "no sound zip|longer than")


def test_too_many_and_too_large(tmp_path: Path) -> None:
    path = archive(tmp_path / "e.zip", {f"bag/{n}": b"x" for n in range(9)})
    refused(path, tmp_path, "more than 5 files", Limits(members=5))
    (tmp_path / "into").rmdir()
    refused(path, tmp_path, "would grow", Limits(total=20))


def test_encrypted_broken_and_other_files(tmp_path: Path) -> None:
    path = archive(tmp_path / "e.zip", {"bag/x": b"x"})
    content = bytearray(path.read_bytes())
    place = content.rindex(b"PK\x01\x02")
    content[place + 8] |= 1
    (tmp_path / "locked.zip").write_bytes(bytes(content))
    refused(tmp_path / "locked.zip", tmp_path, "encrypted")
    (tmp_path / "into").rmdir()
    (tmp_path / "text.zip").write_text("no archive")
    refused(tmp_path / "text.zip", tmp_path, "no sound zip")
    (tmp_path / "into").rmdir()
    with zipfile.ZipFile(tmp_path / "other.zip", "w") as made:
        made.writestr("a/x", "1")
        made.writestr("b/y", "2")
    refused(tmp_path / "other.zip", tmp_path, "no bag")


def test_a_broken_member_leaves_nothing(tmp_path: Path) -> None:
    path = archive(tmp_path / "e.zip", {"bag/x": b"word " * 50})
    content = bytearray(path.read_bytes())
    place = content.index(b"bag/x") + len("bag/x") + 2
    content[place] ^= 0xFF
    path.write_bytes(bytes(content))
    refused(path, tmp_path, "no sound zip")
