"""The records root and seal: RFC 5280's rules as openssl reads them, private files, and what is refused."""

from __future__ import annotations

import stat
import subprocess
from datetime import UTC, datetime
from pathlib import Path

import pytest
from cryptography import x509

from fieldcheck.engine.errors import FieldcheckError
from fieldcheck.keys import sealing

WHEN = datetime(2026, 12, 1, 10, 0, tzinfo=UTC)


@pytest.fixture(scope="module")
def folder(tmp_path_factory: pytest.TempPathFactory) -> Path:
    folder = tmp_path_factory.mktemp("workshop") / "keys"
    sealing.create_sealing_keys(folder, "Invented Workshop", WHEN)
    return folder


def openssl(*arguments: str) -> str:
    done = subprocess.run(["openssl", *arguments], capture_output=True, text=True, check=False)
    return done.stdout + done.stderr


def test_openssl_verifies_the_seal_under_the_root_alone(folder: Path) -> None:
    root, seal = str(folder / "records/root.pem"), str(folder / "records/seal.pem")
    at = str(int(datetime(2056, 11, 30, tzinfo=UTC).timestamp()))
    said = openssl("verify", "-x509_strict", "-attime", at, "-CAfile", root, "-no-CApath", seal)
    assert said.strip() == f"{seal}: OK"  # RFC 5280, 6.1, and the profile that -x509_strict adds
    late = str(int(datetime(2056, 12, 2, tzinfo=UTC).timestamp()))
    assert "certificate has expired" in openssl("verify", "-attime", late, "-CAfile", root, "-no-CApath", seal)


def test_the_root_may_issue_seals_only_and_the_seal_may_issue_nothing(folder: Path) -> None:
    root = openssl("x509", "-in", str(folder / "records/root.pem"), "-noout", "-text")
    seal = openssl("x509", "-in", str(folder / "records/seal.pem"), "-noout", "-text")
    assert "CA:TRUE, pathlen:0" in root
    assert "Certificate Sign, CRL Sign" in root
    assert "CA:FALSE" in seal
    assert "Digital Signature, Non Repudiation" in seal  # openssl's name for contentCommitment
    for text in (root, seal):
        assert "Public-Key: (3072 bit)" in text
        assert "Not Before: Dec  1 10:00:00 2026 GMT" in text
        assert "Not After : Dec  1 10:00:00 2056 GMT" in text


def test_the_fingerprint_is_the_one_openssl_prints(folder: Path) -> None:
    keys = sealing.load_sealing_keys(folder)
    said = openssl("x509", "-in", str(folder / "records/seal.pem"), "-noout", "-fingerprint", "-sha256")
    assert said.strip().split("=")[1].replace(":", "").lower() == sealing.fingerprint(keys.seal)


def test_nobody_else_on_the_machine_can_reach_the_keys(folder: Path) -> None:
    for path in [folder, folder / "records"]:
        assert stat.S_IMODE(path.stat().st_mode) == 0o700
    files = sorted((folder / "records").iterdir())
    assert [file.name for file in files] == ["root.key.pem", "root.pem", "seal.key.pem", "seal.pem"]
    assert {stat.S_IMODE(file.stat().st_mode) for file in files} == {0o600}


def test_keys_are_made_once_and_never_replaced(folder: Path) -> None:
    before = (folder / "records/seal.key.pem").read_bytes()
    with pytest.raises(FieldcheckError, match="never replaced"):
        sealing.create_sealing_keys(folder, "Invented Workshop", WHEN)
    assert (folder / "records/seal.key.pem").read_bytes() == before
    assert [path.name for path in folder.iterdir()] == ["records"]


def test_what_does_not_belong_together_is_refused(folder: Path, tmp_path: Path) -> None:
    assert not sealing.has_sealing_keys(tmp_path)
    with pytest.raises(FieldcheckError, match="no records root yet"):
        sealing.load_sealing_keys(tmp_path)
    sealing.create_sealing_keys(tmp_path, "Another Workshop", WHEN)
    assert sealing.has_sealing_keys(tmp_path)
    ours, theirs = folder / "records", tmp_path / "records"
    kept = (theirs / "root.pem").read_bytes()
    (theirs / "root.pem").write_bytes((ours / "root.pem").read_bytes())
    with pytest.raises(FieldcheckError, match="not issued by this root"):
        sealing.load_sealing_keys(tmp_path)
    (theirs / "root.pem").write_bytes(kept)
    (theirs / "seal.key.pem").write_bytes((ours / "seal.key.pem").read_bytes())
    with pytest.raises(FieldcheckError, match="does not belong to its certificate"):
        sealing.load_sealing_keys(tmp_path)
    (theirs / "seal.key.pem").write_text("no key")
    with pytest.raises(FieldcheckError, match="damaged"):
        sealing.load_sealing_keys(tmp_path)
    (theirs / "seal.key.pem").chmod(0o644)
    with pytest.raises(FieldcheckError, match="other users"):
        sealing.load_sealing_keys(tmp_path)


def test_a_name_that_no_certificate_can_carry_is_refused(tmp_path: Path) -> None:
    for name in ("", "   ", "a\u202eb", "a\x00b"):
        with pytest.raises(FieldcheckError, match="cannot stand in a certificate"):
            sealing.create_sealing_keys(tmp_path / "keys", name, WHEN)
    assert not (tmp_path / "keys").exists()


def test_a_long_name_is_cut_and_a_leap_day_ends_a_day_earlier(tmp_path: Path) -> None:
    keys = sealing.create_sealing_keys(tmp_path, "Ω" * 64, datetime(2028, 2, 29, 8, 0, tzinfo=UTC))
    assert keys.seal.not_valid_after_utc == datetime(2058, 2, 28, 8, 0, tzinfo=UTC)
    names = [one.subject.get_attributes_for_oid(x509.NameOID.COMMON_NAME)[0].value for one in (keys.root, keys.seal)]
    assert names == ["Ω" * 25 + " records root", "Ω" * 32]
