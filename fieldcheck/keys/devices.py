"""Keys of devices: ECDSA on P-256 with SHA-256, in the raw forms that browsers use.

A public key is the uncompressed point (65 bytes, 130 hex digits, the first byte 04: SEC 1, 2.3.3); a signature
is r and s, 32 bytes each, one after the other (128 hex digits: IEEE P1363, WebCrypto). Hex is lower case.
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from pathlib import Path

from cryptography.exceptions import InvalidSignature
from cryptography.hazmat.primitives import hashes, serialization
from cryptography.hazmat.primitives.asymmetric import ec
from cryptography.hazmat.primitives.asymmetric.utils import decode_dss_signature, encode_dss_signature

from fieldcheck.engine.errors import FieldcheckError
from fieldcheck.keys.files import private_folder, read_private, write_private

_PUBLIC = re.compile(r"04[0-9a-f]{128}", re.ASCII)
_SIGNATURE = re.compile(r"[0-9a-f]{128}", re.ASCII)
_ALGORITHM = ec.ECDSA(hashes.SHA256())


def verify(public_hex: str, data: bytes, signature_hex: str) -> bool:
    """Whether the device with this public key signed exactly these bytes. Malformed key or signature: False."""
    if not _PUBLIC.fullmatch(public_hex) or not _SIGNATURE.fullmatch(signature_hex):
        return False
    r, s = int(signature_hex[:64], 16), int(signature_hex[64:], 16)
    try:
        key = ec.EllipticCurvePublicKey.from_encoded_point(ec.SECP256R1(), bytes.fromhex(public_hex))
        key.verify(encode_dss_signature(r, s), data, _ALGORITHM)
    except (ValueError, InvalidSignature):  # ValueError: the point is not on the curve
        return False
    return True


@dataclass(frozen=True)
class DeviceKey:
    """The key with which this machine signs as a device."""

    key: ec.EllipticCurvePrivateKey

    @property
    def public_hex(self) -> str:
        """The uncompressed point, 130 hex digits: what the enrolment event names."""
        point = self.key.public_key().public_bytes(
            serialization.Encoding.X962, serialization.PublicFormat.UncompressedPoint
        )
        return point.hex()

    def sign(self, data: bytes) -> str:
        """Signature over `data`: r and s, 128 hex digits; another one each time, all of them valid."""
        r, s = decode_dss_signature(self.key.sign(data, _ALGORITHM))
        return f"{r:064x}{s:064x}"


def make_device_key(path: Path) -> DeviceKey:
    """Make a key and keep it at `path` (PEM, 0600, its folder 0700). Raises FieldcheckError when one is there."""
    key = ec.generate_private_key(ec.SECP256R1())
    pem = key.private_bytes(serialization.Encoding.PEM, serialization.PrivateFormat.PKCS8, serialization.NoEncryption())
    private_folder(path.parent)
    try:
        write_private(path, pem)
    except FileExistsError as error:
        raise FieldcheckError("a device key is never replaced", str(path), "load it, or enrol a new device") from error
    return DeviceKey(key)


def load_device_key(path: Path) -> DeviceKey:
    """The key kept at `path`. Raises FieldcheckError when it is missing, damaged, or open to other users."""
    pem = read_private(path)
    try:
        key = serialization.load_pem_private_key(pem, password=None)
    except (ValueError, TypeError) as error:
        raise FieldcheckError("the device key is damaged", str(path), "enrol this machine as a new device") from error
    if not isinstance(key, ec.EllipticCurvePrivateKey) or not isinstance(key.curve, ec.SECP256R1):
        raise FieldcheckError("the device key is not an ECDSA P-256 key", str(path))
    return DeviceKey(key)
