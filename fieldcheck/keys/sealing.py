"""The records root and the seal certificate that it issues (RSA-3072, valid 30 years).

The root vouches for the seal and for nothing else, and it is not the authority of the phones' HTTPS: who may
answer on the workshop's network must never be able to seal a record. RSA, not ECDSA: an ECDSA seal makes the
PDF library raise the file's version to 2.0, which PDF/A-3 (ISO 19005-3, on PDF 1.7) does not allow.
Profile: RFC 5280; the seal's key usage is digitalSignature and contentCommitment, as PAdES readers expect.
"""

from __future__ import annotations

import os
import shutil
import tempfile
from dataclasses import dataclass
from datetime import UTC, datetime
from pathlib import Path

from cryptography import x509
from cryptography.hazmat.primitives import hashes, serialization
from cryptography.hazmat.primitives.asymmetric import rsa
from cryptography.x509.oid import NameOID

from fieldcheck.engine.errors import FieldcheckError
from fieldcheck.keys.files import private_folder, read_private, write_private

KEY_BITS = 3072
VALID_YEARS = 30
LONGEST_NAME = 64  # RFC 5280, appendix A: ub-common-name, ub-organization-name; the library counts UTF-8 bytes
FOLDER = "records"  # inside the key folder; it appears whole, by one rename
ROOT, ROOT_KEY, SEAL, SEAL_KEY = "root.pem", "root.key.pem", "seal.pem", "seal.key.pem"


@dataclass(frozen=True)
class SealingKeys:
    """What sealing needs. The root's private key stays in its file: it is needed only to issue another seal."""

    root: x509.Certificate
    seal: x509.Certificate
    seal_key: rsa.RSAPrivateKey

    @property
    def root_pem(self) -> bytes:
        """The root certificate as PEM: what `sealcheck.check` takes as its trust root."""
        return self.root.public_bytes(serialization.Encoding.PEM)


def fingerprint(certificate: x509.Certificate) -> str:
    """SHA-256 of the certificate (DER), 64 lower-case hex digits."""
    return certificate.fingerprint(hashes.SHA256()).hex()


def has_sealing_keys(folder: Path) -> bool:
    """Whether this key folder already holds a records root and its seal."""
    return (folder / FOLDER).is_dir()


def create_sealing_keys(folder: Path, workshop: str, when: datetime | None = None) -> SealingKeys:
    """Make root and seal once, in the key folder `folder` (0700, files 0600), and return them.

    workshop: its name, as readers will show it; a certificate holds 64 bytes of it, a longer one is cut.
    when: start of validity, with time zone; now if left out.
    Raises FieldcheckError when the keys exist already or the name cannot be used.
    """
    start = (when or datetime.now(UTC)).astimezone(UTC).replace(microsecond=0)
    name = _checked_name(workshop)
    private_folder(folder)
    target = folder / FOLDER
    if target.exists():
        raise FieldcheckError("the records root exists already and is never replaced", str(target))
    draft = Path(tempfile.mkdtemp(prefix=".new-", dir=folder))
    try:
        _write_pair(draft, name, start)
        os.rename(draft, target)  # the whole pair appears at once, or not at all
    except BaseException as error:
        shutil.rmtree(draft, ignore_errors=True)
        if target.exists():
            raise FieldcheckError("another process made the records root meanwhile", str(target), "load it") from error
        raise
    return load_sealing_keys(folder)


def load_sealing_keys(folder: Path) -> SealingKeys:
    """Read root, seal and the seal's key. Raises FieldcheckError when they are missing or do not belong together."""
    inside = folder / FOLDER
    if not inside.is_dir():
        raise FieldcheckError("this workshop has no records root yet", str(folder), "create the sealing keys first")
    try:
        root = x509.load_pem_x509_certificate(read_private(inside / ROOT))
        seal = x509.load_pem_x509_certificate(read_private(inside / SEAL))
        key = serialization.load_pem_private_key(read_private(inside / SEAL_KEY), password=None)
    except (ValueError, TypeError) as error:
        raise FieldcheckError("a key file is damaged", str(inside), "restore it from a backup") from error
    if not isinstance(key, rsa.RSAPrivateKey) or key.public_key() != seal.public_key():
        raise FieldcheckError("the seal's key does not belong to its certificate", str(inside / SEAL_KEY))
    try:
        seal.verify_directly_issued_by(root)
    except Exception as error:
        raise FieldcheckError("the seal was not issued by this root", str(inside / SEAL)) from error
    return SealingKeys(root, seal, key)


def _checked_name(workshop: str) -> str:
    name = " ".join(workshop.split())
    if not name or not name.isprintable():
        raise FieldcheckError(
            "the workshop's name cannot stand in a certificate", "workshop", "use printable characters, at least one"
        )
    return name


def _write_pair(folder: Path, workshop: str, start: datetime) -> None:
    root_key = rsa.generate_private_key(public_exponent=65537, key_size=KEY_BITS)
    seal_key = rsa.generate_private_key(public_exponent=65537, key_size=KEY_BITS)
    root_name, seal_name = _name(workshop, " records root"), _name(workshop, "")
    root = _certificate(root_name, root_name, root_key.public_key(), root_key, start, authority=True)
    seal = _certificate(seal_name, root_name, seal_key.public_key(), root_key, start, authority=False)
    write_private(folder / ROOT_KEY, _pem(root_key))
    write_private(folder / SEAL_KEY, _pem(seal_key))
    write_private(folder / ROOT, root.public_bytes(serialization.Encoding.PEM))
    write_private(folder / SEAL, seal.public_bytes(serialization.Encoding.PEM))


def _name(workshop: str, ending: str) -> x509.Name:
    return x509.Name(
        [
            x509.NameAttribute(NameOID.ORGANIZATION_NAME, _cut(workshop, LONGEST_NAME)),
            x509.NameAttribute(NameOID.COMMON_NAME, _cut(workshop, LONGEST_NAME - len(ending)) + ending),
        ]
    )


def _cut(text: str, size: int) -> str:
    """The longest start of `text` that takes at most `size` bytes of UTF-8, whole characters only."""
    return text.encode("utf-8")[:size].decode("utf-8", "ignore").rstrip()


def _end(start: datetime) -> datetime:
    try:
        return start.replace(year=start.year + VALID_YEARS)
    except ValueError:  # 29 February, and no such day in the last year
        return start.replace(year=start.year + VALID_YEARS, day=28)


def _certificate(
    subject: x509.Name,
    issuer: x509.Name,
    public_key: rsa.RSAPublicKey,
    issuer_key: rsa.RSAPrivateKey,
    start: datetime,
    authority: bool,
) -> x509.Certificate:
    """RFC 5280, 4.2.1: basic constraints, key usage, and key identifiers so that a reader finds the issuer."""
    issuer_identifier = x509.AuthorityKeyIdentifier.from_issuer_public_key(issuer_key.public_key())
    return (
        x509.CertificateBuilder()
        .subject_name(subject)
        .issuer_name(issuer)
        .public_key(public_key)
        .serial_number(x509.random_serial_number())
        .not_valid_before(start)
        .not_valid_after(_end(start))
        .add_extension(x509.BasicConstraints(ca=authority, path_length=0 if authority else None), critical=True)
        .add_extension(_key_usage(authority), critical=True)
        .add_extension(x509.SubjectKeyIdentifier.from_public_key(public_key), critical=False)
        .add_extension(issuer_identifier, critical=False)
        .sign(issuer_key, hashes.SHA256())
    )


def _key_usage(authority: bool) -> x509.KeyUsage:
    return x509.KeyUsage(
        digital_signature=not authority,
        content_commitment=not authority,
        key_cert_sign=authority,
        crl_sign=authority,
        key_encipherment=False,
        data_encipherment=False,
        key_agreement=False,
        encipher_only=False,
        decipher_only=False,
    )


def _pem(key: rsa.RSAPrivateKey) -> bytes:
    return key.private_bytes(
        serialization.Encoding.PEM, serialization.PrivateFormat.PKCS8, serialization.NoEncryption()
    )
