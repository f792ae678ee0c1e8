"""A detached Ed25519 signature over a bag's manifests, and a place for a time stamp token.

The signature is over ``tagmanifest-sha512.txt``, which lists the manifests, which list every
file. A token of RFC 3161 is made by somebody else's authority over the same file; it is kept
beside the signature, and only its imprint is looked at here.
Specification: RFC 8032 (Ed25519: the same key and file give the same signature).
"""

import base64
import hashlib
import json
from dataclasses import dataclass
from pathlib import Path

from cryptography.exceptions import InvalidSignature, UnsupportedAlgorithm
from cryptography.hazmat.primitives.asymmetric.ed25519 import (
    Ed25519PrivateKey,
    Ed25519PublicKey,
)
from cryptography.hazmat.primitives.serialization import (
    Encoding,
    PublicFormat,
    load_pem_private_key,
    load_pem_public_key,
)

from rca.archive.codec import dumps
from rca.base.errors import ArchiveError
from rca.bundle.bag import SIGNED

SIGNATURE = f"signatures/{SIGNED}.ed25519.json"
TOKEN = f"signatures/{SIGNED}.tsr"
LARGEST = 1 << 20  # [bytes] of a key, a signature or a token


@dataclass(frozen=True, slots=True, kw_only=True)
class Signature:
    """What the signature of a bundle says."""

    state: str  # "none", "valid" or "invalid"
    key: str = ""  # SHA-256 of the public key, hexadecimal
    trusted: bool = False  # the key is one the auditor named
    stamp: str = "none"  # time stamp: "none", "imprint fits" or "imprint does not fit"


def read_private_key(path: Path, passphrase: bytes | None = None) -> Ed25519PrivateKey:
    """An Ed25519 key in PEM.

    Raises ArchiveError where it is none, or needs another passphrase.
    """
    try:
        key = load_pem_private_key(_small(path), passphrase)
    except TypeError as error:  # a passphrase is missing, or there is one too many
        raise ArchiveError(f"{path.name}: {error}") from error
    except (ValueError, UnsupportedAlgorithm) as error:
        raise ArchiveError(
            f"{path.name} can't be read as a private key in PEM: {error}"
        ) from error
    if not isinstance(key, Ed25519PrivateKey):
        raise ArchiveError(
            f"{path.name} is no Ed25519 key. Make one with:  openssl genpkey -algorithm ed25519"
        )
    return key


def read_public_key(path: Path) -> Ed25519PublicKey:
    """An Ed25519 public key in PEM.

    Raises ArchiveError where it is none.
    """
    try:
        key = load_pem_public_key(_small(path))
    except (ValueError, UnsupportedAlgorithm) as error:
        raise ArchiveError(f"{path.name} can't be read as a public key in PEM: {error}") from error
    if not isinstance(key, Ed25519PublicKey):
        raise ArchiveError(f"{path.name} is no Ed25519 public key")
    return key


def signature_file(key: Ed25519PrivateKey, signed: bytes) -> bytes:
    """The content of the signature file over the signed manifest."""
    return dumps(
        {
            "algorithm": "Ed25519",
            "signed": SIGNED,
            "sha512": hashlib.sha512(signed).hexdigest(),
            "public_key": base64.b64encode(_raw(key.public_key())).decode(),
            "signature": base64.b64encode(key.sign(signed)).decode(),
        }
    ).encode()


def check_signature(root: Path, trusted: Ed25519PublicKey | None = None) -> Signature:
    """What the signature of an unpacked bag says about its manifests."""
    signed = (root / SIGNED).read_bytes()
    stamp = _stamp(root / TOKEN, signed)
    path = root / SIGNATURE
    if not path.is_file():
        return Signature(state="none", stamp=stamp)
    try:
        plain = json.loads(_small(path))
        raw = base64.b64decode(plain["public_key"], validate=True)
        key = Ed25519PublicKey.from_public_bytes(raw)
        key.verify(base64.b64decode(plain["signature"], validate=True), signed)
    except (ValueError, KeyError, TypeError, RecursionError, InvalidSignature):
        return Signature(state="invalid", stamp=stamp)
    return Signature(
        state="valid",
        key=hashlib.sha256(raw).hexdigest(),
        trusted=trusted is not None and _raw(trusted) == raw,
        stamp=stamp,
    )


def _stamp(path: Path, signed: bytes) -> str:
    if not path.is_file():
        return "none"
    content = _small(path)
    imprints = (hashlib.new(kind, signed).digest() for kind in ("sha256", "sha384", "sha512"))
    fits = any(imprint in content for imprint in imprints)
    return "imprint fits" if fits else "imprint does not fit"


def _raw(key: Ed25519PublicKey) -> bytes:
    return key.public_bytes(Encoding.Raw, PublicFormat.Raw)


def _small(path: Path) -> bytes:
    try:
        if path.stat().st_size > LARGEST:
            raise ArchiveError(f"{path.name} is too large for a key or a signature")
        return path.read_bytes()
    except OSError as error:
        raise ArchiveError(f"{path} can't be read ({error.strerror})") from error
