"""The workshop's seal on a finished record: PAdES B-B, invisible, certified, no later change allowed.

PAdES baseline level B-B: ETSI EN 319 142-1. Why this shape (measured in the study of signed PDFs): the unsigned
bytes stay an exact prefix; one revision only, so that a strict check may demand that the seal covers the whole
file; the root is not embedded, so that no byte of the seal goes unexamined; nothing is drawn, because the default
stamp uses a font that is not embedded, which PDF/A forbids.
"""

from __future__ import annotations

import io
from datetime import UTC, datetime
from typing import Any

from asn1crypto import keys as asn1_keys
from asn1crypto import x509 as asn1_x509
from cryptography.hazmat.primitives import serialization
from pyhanko.pdf_utils.incremental_writer import IncrementalPdfFileWriter
from pyhanko.sign import fields, signers
from pyhanko.sign.signers.pdf_signer import PdfSigningSession
from pyhanko_certvalidator.registry import SimpleCertificateStore

from fieldcheck.engine.errors import FieldcheckError
from fieldcheck.keys.sealing import SealingKeys
from fieldcheck.records.apart import apart

FIELD = "RecordSeal"


def seal(pdf: bytes, keys: SealingKeys, when: datetime) -> bytes:
    """The sealed file: `pdf` unchanged, followed by one revision that holds the seal.

    pdf: an unsealed PDF/A-3 file. when: the signing time it will state, with time zone.
    Raises FieldcheckError when `when` lies outside the seal's validity or the file cannot be sealed.
    """
    moment = when.astimezone(UTC).replace(microsecond=0)
    if not keys.seal.not_valid_before_utc <= moment <= keys.seal.not_valid_after_utc:
        raise FieldcheckError(
            "the seal's certificate is not valid at this time",
            moment.isoformat(),
            "set the clock right, or issue a new seal",
        )
    writer = _QuietWriter(io.BytesIO(pdf))
    if writer.prev.embedded_signatures:
        raise FieldcheckError("the file is sealed already", "", "an amendment is a new record that names the old")
    meta = signers.PdfSignatureMetadata(
        field_name=FIELD,
        md_algorithm="sha256",
        subfilter=fields.SigSeedSubFilter.PADES,
        certify=True,
        docmdp_permissions=fields.MDPPerm.NO_CHANGES,
    )
    signer = _DatedSigner(meta, _signer(keys), moment)
    output = io.BytesIO()
    apart(signer.sign_pdf, writer, output=output)
    return output.getvalue()


def _signer(keys: SealingKeys) -> signers.SimpleSigner:
    """pyHanko's signer from keys in memory; no certificate registry, so that only the seal's is embedded."""
    der = serialization.Encoding.DER
    private = keys.seal_key.private_bytes(der, serialization.PrivateFormat.PKCS8, serialization.NoEncryption())
    return signers.SimpleSigner(
        signing_cert=asn1_x509.Certificate.load(keys.seal.public_bytes(der)),
        signing_key=asn1_keys.PrivateKeyInfo.load(private),
        cert_registry=SimpleCertificateStore(),  # type: ignore[no-untyped-call]
    )


class _QuietWriter(IncrementalPdfFileWriter):
    """Leaves the document's metadata as rendered: else the XMP is rewritten with this machine's clock."""

    def _update_meta(self) -> None:
        return None


class _DatedSigner(signers.PdfSigner):
    """States the given time instead of asking this machine's clock."""

    def __init__(self, meta: signers.PdfSignatureMetadata, signer: signers.SimpleSigner, moment: datetime) -> None:
        super().__init__(meta, signer=signer, new_field_spec=fields.SigFieldSpec(FIELD, on_page=0))
        self._moment = moment

    def init_signing_session(self, *given: Any, **named: Any) -> PdfSigningSession:  # pyHanko's own arguments
        session = super().init_signing_session(*given, **named)
        session.system_time = self._moment
        return session
