"""Signatures of devices, against RFC 6979's worked example and openssl."""

from __future__ import annotations

import stat
import subprocess
from pathlib import Path

import pytest
from cryptography.hazmat.primitives import serialization
from cryptography.hazmat.primitives.asymmetric import ec
from cryptography.hazmat.primitives.asymmetric.utils import encode_dss_signature

from fieldcheck.engine.errors import FieldcheckError
from fieldcheck.keys import devices

# RFC 6979, A.2.5: P-256, SHA-256, message "sample". Typed from memory (MEM?); a wrong digit would not verify.
PUBLIC = (
    "0460fed4ba255a9d31c961eb74c6356d68c049b8923b61fa6ce669622e60f29fb6"
    "7903fe1008b8bc99a41ae9e95628bc64f2f1b20c2d7e9f5177a3c294d4462299"
)
SIGNATURE = (
    "efd48b2aacb6a8fd1140dd9cd45e81d69d2c877b56aaf991c34d0ea84eaf3716"
    "f7cb1c942d657c41d436c7a1b6e29f65f3e900dbb9aff4064dc4ab2f843acda8"
)


def test_the_published_signature_verifies_and_no_neighbour_of_it_does() -> None:
    assert devices.verify(PUBLIC, b"sample", SIGNATURE)
    assert not devices.verify(PUBLIC, b"Sample", SIGNATURE)
    for at in range(0, 128, 7):
        other = f"{int(SIGNATURE[at], 16) ^ 1:x}"
        assert not devices.verify(PUBLIC, b"sample", SIGNATURE[:at] + other + SIGNATURE[at + 1 :])


@pytest.mark.parametrize(
    "public",
    ["", PUBLIC[:-2], PUBLIC + "00", PUBLIC.upper(), "02" + PUBLIC[2:66], PUBLIC[:-1] + "8", "04" + "00" * 64, "zz"],
)
def test_a_malformed_public_key_verifies_nothing(public: str) -> None:
    assert not devices.verify(public, b"sample", SIGNATURE)


@pytest.mark.parametrize(
    "signature", ["", SIGNATURE[:-2], SIGNATURE + "00", SIGNATURE.upper(), "0" * 128, "f" * 128, "é" * 128]
)
def test_a_malformed_signature_is_not_one(signature: str) -> None:
    assert not devices.verify(PUBLIC, b"sample", signature)


def test_openssl_accepts_what_the_desk_signs(tmp_path: Path) -> None:
    key = devices.make_device_key(tmp_path / "keys" / "desk.pem")
    signature = key.sign(b"fieldcheck head 1\n...")
    assert devices.verify(key.public_hex, b"fieldcheck head 1\n...", signature)
    point = ec.EllipticCurvePublicKey.from_encoded_point(ec.SECP256R1(), bytes.fromhex(key.public_hex))
    form = serialization.PublicFormat.SubjectPublicKeyInfo
    (tmp_path / "public.pem").write_bytes(point.public_bytes(serialization.Encoding.PEM, form))
    r, s = int(signature[:64], 16), int(signature[64:], 16)
    (tmp_path / "signature.der").write_bytes(encode_dss_signature(r, s))
    (tmp_path / "data").write_bytes(b"fieldcheck head 1\n...")
    command = ["openssl", "dgst", "-sha256", "-verify", "public.pem", "-signature", "signature.der", "data"]
    said = subprocess.run(command, capture_output=True, text=True, cwd=tmp_path, check=False)
    assert said.stdout.strip() == "Verified OK"


def test_the_key_is_kept_for_its_owner_alone_and_comes_back(tmp_path: Path) -> None:
    path = tmp_path / "keys" / "desk.pem"
    key = devices.make_device_key(path)
    assert stat.S_IMODE(path.stat().st_mode) == 0o600
    assert stat.S_IMODE(path.parent.stat().st_mode) == 0o700
    assert devices.load_device_key(path).public_hex == key.public_hex
    with pytest.raises(FieldcheckError, match="never replaced"):
        devices.make_device_key(path)
    assert devices.load_device_key(path).public_hex == key.public_hex


def test_a_key_that_cannot_be_trusted_is_refused(tmp_path: Path) -> None:
    path = tmp_path / "desk.pem"
    with pytest.raises(FieldcheckError, match="cannot be read"):
        devices.load_device_key(path)
    devices.make_device_key(path)
    path.chmod(0o640)
    with pytest.raises(FieldcheckError, match="other users"):
        devices.load_device_key(path)
    path.chmod(0o600)
    path.write_text("no key")
    with pytest.raises(FieldcheckError, match="damaged"):
        devices.load_device_key(path)
    other = ec.generate_private_key(ec.SECP384R1()).private_bytes(
        serialization.Encoding.PEM, serialization.PrivateFormat.PKCS8, serialization.NoEncryption()
    )
    path.write_bytes(other)
    with pytest.raises(FieldcheckError, match="not an ECDSA P-256 key"):
        devices.load_device_key(path)
