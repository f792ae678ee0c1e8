"""A bundle is a valid bag and a valid crate, the same bytes each time, and signed on request."""

import hashlib
import json
import shutil
import warnings
import zipfile
from pathlib import Path

import pytest
from click.testing import CliRunner
from cryptography.hazmat.primitives import serialization
from cryptography.hazmat.primitives.asymmetric import ec, ed25519

from rca.base.errors import ArchiveError
from rca.bundle.bag import SIGNED, check_bag, digests_of_bytes, manifest
from rca.bundle.pack import ChangedError, pack
from rca.bundle.signature import check_signature, read_private_key, read_public_key
from rca.bundle.unpack import unpack
from rca.cli.main import main


def pem(key, path: Path) -> Path:
    path.write_bytes(
        key.private_bytes(
            serialization.Encoding.PEM,
            serialization.PrivateFormat.PKCS8,
            serialization.NoEncryption(),
        )
    )
    return path


def unpacked(bundle: Path, into: Path) -> Path:
    into.mkdir()
    return unpack(bundle, into)


@pytest.fixture
def case(made: Path, tmp_path: Path) -> Path:
    return Path(shutil.copytree(made, tmp_path / "case"))


@pytest.fixture
def bag(made: Path, tmp_path: Path) -> Path:
    pack(made / "report", made, tmp_path / "b.zip")
    return unpacked(tmp_path / "b.zip", tmp_path / "bag")


@pytest.mark.outside_value(source="RFC 8493 as checked by the bagit library")
def test_the_bag_is_valid_and_complete(bag: Path) -> None:
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        import bagit

        opened = bagit.Bag(str(bag))
        opened.validate(completeness_only=False)
        assert opened.version == "1.0"
        assert set(opened.algorithms) == {"sha256", "sha512"}
    assert check_bag(bag) == ()


@pytest.mark.outside_value(source="RFC 8493 section 2.1.3: LF, CR and % are percent-encoded")
def test_a_manifest_encodes_the_three_signs(tmp_path: Path) -> None:
    one = digests_of_bytes(b"abc")
    text = manifest({"data/50%.svg": one, "data/a\nb": one}, "sha256")
    # SHA-256 of "abc": FIPS 180-2, example B.1
    assert text.split()[0] == "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad"
    assert [line.split("  ")[1] for line in text.splitlines()] == ["data/50%25.svg", "data/a%0Ab"]


@pytest.mark.outside_value(source="RO-Crate 1.1 as read by the rocrate library")
def test_the_crate_names_every_file_and_what_made_it(bag: Path) -> None:
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        from rocrate.rocrate import ROCrate

        crate = ROCrate(str(bag / "data"))
    files = {e.id for e in crate.data_entities}
    there = {p for p in (bag / "data").rglob("*") if p.is_file()}
    assert len(files) == len(there) - 1  # the metadata file describes itself
    run = crate.dereference("#run")
    assert run.type == ["CreateAction", "prov:Activity"]
    assert run["instrument"].id == "#rca"
    assert {e.id for e in run["object"]} >= {"case/case.toml"}
    result = crate.dereference("report/results.json")
    assert result["wasGeneratedBy"].id == "#run"
    content = (bag / "data" / "report" / "results.json").read_bytes()
    assert result["sha256"] == hashlib.sha256(content).hexdigest()


def test_the_crate_of_the_report_itself_is_readable(made: Path) -> None:
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        from rocrate.rocrate import ROCrate

        crate = ROCrate(str(made / "report"))
    assert crate.dereference("#input/case.toml")["additionalType"] == "descriptor"


def test_the_same_report_gives_the_same_bytes(made: Path, tmp_path: Path) -> None:
    key = read_private_key(pem(ed25519.Ed25519PrivateKey.generate(), tmp_path / "k.pem"))
    one = pack(made / "report", made, tmp_path / "1.zip", key=key)
    shutil.copytree(made, tmp_path / "moved")  # other dates, another place
    two = pack(tmp_path / "moved" / "report", tmp_path / "moved", tmp_path / "2.zip", key=key)
    assert (tmp_path / "1.zip").read_bytes() == (tmp_path / "2.zip").read_bytes()
    assert one.sha256 == two.sha256
    with zipfile.ZipFile(tmp_path / "1.zip") as archive:
        names = archive.namelist()
        assert names == sorted(names)
        assert {m.compress_type for m in archive.infolist()} == {zipfile.ZIP_STORED}


def test_a_signature_holds_until_a_byte_changes(made: Path, tmp_path: Path) -> None:
    key = ed25519.Ed25519PrivateKey.generate()
    path = pem(key, tmp_path / "k.pem")
    pack(made / "report", made, tmp_path / "s.zip", key=read_private_key(path))
    root = unpacked(tmp_path / "s.zip", tmp_path / "s")
    public = tmp_path / "p.pem"
    public.write_bytes(
        key.public_key().public_bytes(
            serialization.Encoding.PEM, serialization.PublicFormat.SubjectPublicKeyInfo
        )
    )
    assert check_signature(root).state == "valid"
    assert not check_signature(root).trusted
    assert check_signature(root, read_public_key(public)).trusted
    other = ed25519.Ed25519PrivateKey.generate().public_key()
    assert not check_signature(root, other).trusted
    signed = (root / SIGNED).read_bytes()
    (root / SIGNED).write_bytes(bytes([signed[0] ^ 1]) + signed[1:])
    assert check_signature(root).state == "invalid"


def test_a_time_stamp_token_is_kept_and_held_against_the_manifest(
    made: Path, tmp_path: Path
) -> None:
    imprint = pack(made / "report", made, tmp_path / "1.zip").imprint
    for token, words in ((bytes.fromhex(imprint), "imprint fits"), (b"x", "imprint does not fit")):
        name = tmp_path / f"{words}.zip"
        pack(made / "report", made, name, token=b"\x30" + token)
        root = unpacked(name, tmp_path / words)
        assert check_signature(root).stamp == words


def test_a_key_of_another_kind_is_refused(tmp_path: Path) -> None:
    path = pem(ec.generate_private_key(ec.SECP256R1()), tmp_path / "k.pem")
    with pytest.raises(ArchiveError, match="no Ed25519 key"):
        read_private_key(path)
    path.write_text("no key")
    with pytest.raises(ArchiveError, match="can't be read as a private key"):
        read_private_key(path)


TAMPERED = {
    "case.toml": "input",
    "oil/Bericht Öl.txt": "input",
    "teardown/findings.csv": "input",
    "report/results.json": "results",
    "report/notebooks/n.ipynb": "notebook",
    "report/figures/ä 50.svg": "report",
    "report/report.html": "report",
    "report/record.json": "record",
}


@pytest.mark.parametrize("name", TAMPERED)
def test_one_byte_of_the_same_length_is_named_and_nothing_written(
    case: Path, tmp_path: Path, name: str
) -> None:
    content = (case / name).read_bytes()
    place = content.rindex(b"0") if b"0" in content else len(content) // 2
    (case / name).write_bytes(content[:place] + bytes([content[place] ^ 1]) + content[place + 1 :])
    with pytest.raises(ChangedError) as caught:
        pack(case / "report", case, tmp_path / "b.zip")
    breach = caught.value.breaches[0]
    assert (breach.kind, breach.area) == ("changed", TAMPERED[name])
    assert name.endswith(breach.name)
    assert breach.expected != breach.found
    assert not (tmp_path / "b.zip").exists()


def test_a_missing_and_an_unexpected_file_are_named(case: Path, tmp_path: Path) -> None:
    (case / "history.csv").unlink()
    (case / "report" / "extra.txt").write_text("x")
    (case / "report" / "report.html").unlink()
    done = CliRunner().invoke(
        main, ["bundle", str(case / "report"), "--out", str(tmp_path / "b.zip"), "--json"]
    )
    assert done.exit_code == 1
    rows = {(b["kind"], b["name"]) for b in json.loads(done.stdout)["breaches"]}
    assert rows == {
        ("missing", "history.csv"),
        ("unexpected", "extra.txt"),
        ("missing", "report.html"),
    }


@pytest.mark.parametrize(
    ("name", "kind"),
    [
        ("data/case/case.toml", "changed"),
        ("data/report/results.json", "missing"),
        ("data/new.txt", "unexpected"),
        ("bag-info.txt", "changed"),
        ("manifest-sha256.txt", "changed"),
    ],
)
def test_a_bag_that_is_not_as_packed_is_named(bag: Path, name: str, kind: str) -> None:
    path = bag / name
    if kind == "missing":
        path.unlink()
    elif kind == "unexpected":
        path.write_text("x")
    else:
        content = path.read_bytes()
        path.write_bytes(content[:-2] + bytes([content[-2] ^ 1]) + content[-1:])
    found = check_bag(bag)
    assert (kind, name) in {(b.kind, b.name) for b in found}


def test_a_report_outside_its_case_asks_for_the_case(made: Path, tmp_path: Path) -> None:
    shutil.copytree(made / "report", tmp_path / "alone")
    done = CliRunner().invoke(main, ["bundle", str(tmp_path / "alone")])
    assert done.exit_code == 2
    assert "--case" in done.stderr
