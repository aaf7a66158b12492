"""Checks a sealed record from the file alone, offline, and says in one sentence what is wrong with it.

A PDF signature library's own verdict is not enough: it calls a file sound when bytes were appended after its end,
or when unused bytes inside the signature's container were changed. So on top of it this demands exactly one seal,
that covers every byte but its own container; that the container is one spelling of one DER object followed by
zeros and nothing else; and that this object holds the signer's certificate alone.
PAdES baseline: ETSI EN 319 142-1; signature container and ByteRange: ISO 32000-1, 12.8.
"""

from __future__ import annotations

import io
import logging
import re
from collections.abc import Iterator, Mapping
from contextlib import contextmanager
from dataclasses import dataclass, field
from datetime import UTC, datetime
from types import MappingProxyType
from typing import Any, Literal

import pikepdf
from asn1crypto import cms
from asn1crypto import pem as asn1_pem
from asn1crypto import x509 as asn1_x509
from pyhanko.pdf_utils.misc import PdfReadError
from pyhanko.pdf_utils.reader import PdfFileReader
from pyhanko.sign.diff_analysis import ModificationLevel
from pyhanko.sign.validation import validate_pdf_signature
from pyhanko.sign.validation.pdf_embedded import EmbeddedPdfSignature
from pyhanko.sign.validation.status import PdfSignatureStatus, SignatureCoverageLevel
from pyhanko_certvalidator import ValidationContext

from fieldcheck.records.apart import apart

State = Literal["intact_trusted", "intact_unknown_signer", "altered", "no_seal"]
NO_ATTACHMENTS: Mapping[str, bytes] = MappingProxyType({})

NOT_A_PDF = "This is not a PDF file."
DAMAGED = "The file is cut short or damaged: it cannot be read as it was sealed."
NO_SEAL = "The file carries no seal: nothing shows who made it or whether it was changed."
SEAL_GONE = "The seal was damaged or taken off."
SEVERAL = "The file carries more than one seal; a record has exactly one."
CHANGED = "The content of the file was changed after it was sealed."
SEAL_CHANGED = "The seal itself was changed after it was made."
ADDED = "Something was added to the file after it was sealed."
NOT_WHOLE = "The seal does not cover the whole file."
NOT_OURS = "The seal is not of the kind that a record carries."
UNKNOWN_ROOT = (
    "The file is as it was sealed, but no trusted root was given: compare the signer's fingerprint with one "
    "that the workshop told you by another way."
)
FOREIGN = "The file is as it was sealed, but the seal was not made under the root given: anybody can have made it."


@dataclass(frozen=True)
class SealReport:
    """state and one plain sentence. signer: the name in the seal's certificate; signer_fingerprint: SHA-256 of that
    certificate, hex; signed_at: the time the seal states, UTC (the signer's own claim); attachments: bytes by name,
    only from an intact file. Where there is nothing to say the texts are "" and the time None."""

    state: State
    sentence: str
    signer: str = ""
    signer_fingerprint: str = ""
    signed_at: datetime | None = None
    attachments: Mapping[str, bytes] = field(default_factory=lambda: NO_ATTACHMENTS)

    @property
    def intact(self) -> bool:
        """Whether the file is byte for byte what its signer sealed; says nothing about who that was."""
        return self.state in ("intact_trusted", "intact_unknown_signer")


class _Altered(Exception):
    """Carries the sentence."""


def check(pdf: bytes, trust_root_pem: bytes | None) -> SealReport:
    """Judge the file. trust_root_pem: the records root of the workshop as PEM, or None when it is not at hand.

    Never raises for what the file holds: whatever cannot be read is altered. Raises ValueError when
    `trust_root_pem` itself is not a certificate.
    """
    root = None if trust_root_pem is None else _certificate(trust_root_pem)
    if not pdf.startswith(b"%PDF-"):
        return SealReport("altered", NOT_A_PDF)
    try:
        with _quiet():
            return apart(_judged, pdf, root)
    except _Altered as altered:
        return SealReport("altered", str(altered))
    except Exception:  # readers raise dozens of kinds on damaged files, and every one means the same here
        return SealReport("altered", DAMAGED)


def _judged(pdf: bytes, root: asn1_x509.Certificate | None) -> SealReport:
    reader = PdfFileReader(io.BytesIO(pdf))
    try:
        signatures = reader.embedded_signatures
    except PdfReadError as error:
        raise _Altered(SEAL_GONE if b"/ByteRange" in pdf else DAMAGED) from error
    if not signatures:
        if b"/ByteRange" in pdf:
            raise _Altered(SEAL_GONE)
        return SealReport("no_seal", NO_SEAL)
    if len(signatures) > 1:
        raise _Altered(SEVERAL)
    signature = signatures[0]
    _demand_full_length(pdf, signature)
    moment = signature.self_reported_timestamp
    status = validate_pdf_signature(signature, _context(root, moment))
    _demand_intact(status)
    _demand_whole_file(pdf, signature, status)
    _demand_plain_container(pdf, signature)
    if moment is None:
        raise _Altered(NOT_OURS)
    return _report(pdf, signature.signer_cert, moment.astimezone(UTC), root, bool(status.trusted))


def _context(root: asn1_x509.Certificate | None, moment: datetime | None) -> ValidationContext:
    """Trust this root alone, fetch nothing. The chain is judged at the time the seal states, so that a record
    still verifies when the certificate has run out; a list of no roots, because None would mean the system's."""
    return ValidationContext(
        trust_roots=[] if root is None else [root],
        allow_fetching=False,
        revocation_mode="soft-fail",
        moment=moment,
    )


def _demand_full_length(pdf: bytes, signature: EmbeddedPdfSignature) -> None:
    start, before, after, length = (int(number) for number in signature.byte_range)
    if start != 0 or not 0 < before < after or length < 0:
        raise _Altered(NOT_WHOLE)
    if after + length > len(pdf):  # cut, or written anew with the seal at another place
        in_place = pdf[before : before + 1] == b"<" and pdf[after - 1 : after] == b">"
        raise _Altered(DAMAGED if in_place else CHANGED)


def _demand_intact(status: PdfSignatureStatus) -> None:
    if not status.intact:
        raise _Altered(CHANGED)
    if not status.valid:
        raise _Altered(SEAL_CHANGED)


def _demand_whole_file(pdf: bytes, signature: EmbeddedPdfSignature, status: PdfSignatureStatus) -> None:
    _, _, after, length = (int(number) for number in signature.byte_range)
    if after + length < len(pdf):
        raise _Altered(ADDED)
    if status.coverage != SignatureCoverageLevel.ENTIRE_FILE:
        raise _Altered(NOT_WHOLE)
    if status.modification_level != ModificationLevel.NONE or not status.docmdp_ok:
        raise _Altered(ADDED)


_HEX_AS_WRITTEN = re.compile(rb"<[0-9A-F]*>")  # upper case, as `seal` writes it: lower case is a second spelling


def _demand_plain_container(pdf: bytes, signature: EmbeddedPdfSignature) -> None:
    """The bytes that the seal cannot cover, its own container, hold nothing but the seal in its only spelling."""
    _, before, after, _ = (int(number) for number in signature.byte_range)
    gap = pdf[before:after]
    if not _HEX_AS_WRITTEN.fullmatch(gap) or len(gap) % 2:
        raise _Altered(SEAL_CHANGED)
    held = bytes.fromhex(gap[1:-1].decode("ascii"))
    content = cms.ContentInfo.load(held, strict=False)
    der = content.dump(force=True)
    if held[: len(der)] != der or any(held[len(der) :]):
        raise _Altered(SEAL_CHANGED)
    if bytes(signature.pkcs7_content) != held:
        raise _Altered(SEAL_CHANGED)
    signed_data = content["content"]
    if len(signed_data["certificates"]) != 1 or len(signed_data["signer_infos"]) != 1 or _extras(signed_data):
        raise _Altered(NOT_OURS)


def _extras(signed_data: Any) -> bool:
    """Whether the container carries what nothing signs: revocation lists, unsigned attributes."""
    return bool(signed_data["crls"].native) or bool(signed_data["signer_infos"][0]["unsigned_attrs"].native)


def _report(
    pdf: bytes, certificate: asn1_x509.Certificate, moment: datetime, root: asn1_x509.Certificate | None, trusted: bool
) -> SealReport:
    name = str(certificate.subject.native.get("common_name", certificate.subject.human_friendly))
    print_of_signer = bytes(certificate.sha256).hex()
    attachments = _attachments(pdf)
    if trusted and root is not None:
        day = moment.date().isoformat()
        sentence = f"The file is exactly as {name} sealed it on {day}, under the root given."
        return SealReport("intact_trusted", sentence, name, print_of_signer, moment, attachments)
    sentence = UNKNOWN_ROOT if root is None else FOREIGN
    return SealReport("intact_unknown_signer", sentence, name, print_of_signer, moment, attachments)


def _attachments(pdf: bytes) -> Mapping[str, bytes]:
    with pikepdf.open(io.BytesIO(pdf), attempt_recovery=False) as document:
        return MappingProxyType({name: held.get_file().read_bytes() for name, held in document.attachments.items()})


def _certificate(pem: bytes) -> asn1_x509.Certificate:
    if not asn1_pem.detect(pem):
        raise ValueError("the trust root is not a PEM certificate")
    kind, _, der = asn1_pem.unarmor(pem)
    if kind != "CERTIFICATE":
        raise ValueError("the trust root is not a PEM certificate")
    return asn1_x509.Certificate.load(der, strict=True)


@contextmanager
def _quiet() -> Iterator[None]:
    """pyHanko logs a traceback for every seal it cannot trust; the report says it in a sentence instead."""
    loggers = [logging.getLogger(name) for name in ("pyhanko", "pyhanko_certvalidator")]
    before = [logger.level for logger in loggers]
    for logger in loggers:
        logger.setLevel(logging.CRITICAL + 1)
    try:
        yield
    finally:
        for logger, level in zip(loggers, before, strict=True):
            logger.setLevel(level)
