"""The seal, judged by readers that are not ours, and by our own strict check under attack.

Level and form: PAdES B-B, ETSI EN 319 142-1; container and ByteRange: ISO 32000-1, 12.8; CMS: RFC 5652.
Outside judges: pdfsig (poppler on NSS), openssl cms, qpdf, pikepdf's PDF/A checker.
"""

from __future__ import annotations

import io
import random
import re
import subprocess
from collections.abc import Callable
from datetime import UTC, datetime, timedelta
from pathlib import Path

import pikepdf
import pikepdf.pdfa
import pypdf
import pytest
import sample_record as sample
from asn1crypto import cms
from asn1crypto import pem as asn1_pem
from asn1crypto import x509 as asn1_x509
from pyhanko.pdf_utils import generic
from pyhanko.pdf_utils.incremental_writer import IncrementalPdfFileWriter
from pyhanko.sign import fields, signers

from fieldcheck.engine.errors import FieldcheckError
from fieldcheck.keys import sealing
from fieldcheck.keys.sealing import SealingKeys
from fieldcheck.records import seal as sealer
from fieldcheck.records import sealcheck
from fieldcheck.records.apart import apart
from fieldcheck.records.pdf import render
from fieldcheck.records.seal import seal
from fieldcheck.records.sealcheck import check


@pytest.fixture(scope="module")
def keys(tmp_path_factory: pytest.TempPathFactory) -> SealingKeys:
    return sealing.create_sealing_keys(tmp_path_factory.mktemp("keys"), "Invented Workshop", sample.WHEN)


@pytest.fixture(scope="module")
def stranger(tmp_path_factory: pytest.TempPathFactory) -> SealingKeys:
    """Another root under the same name."""
    return sealing.create_sealing_keys(tmp_path_factory.mktemp("others"), "Invented Workshop", sample.WHEN)


@pytest.fixture(scope="module")
def unsealed() -> bytes:
    return render(sample.HTML, sample.CSS, sample.ATTACHMENTS, sample.WHEN, sample.assets())


@pytest.fixture(scope="module")
def sealed(unsealed: bytes, keys: SealingKeys) -> bytes:
    return seal(unsealed, keys, sample.WHEN)


def container(pdf: bytes) -> tuple[int, int]:
    """Start and end of the bytes that the seal does not cover: the container with its brackets."""
    found = re.findall(rb"/ByteRange \[\s*0\s+(\d+)\s+(\d+)\s+\d+\s*\]", pdf)
    assert len(found) == 1
    return int(found[0][0]), int(found[0][1])


# What others say


def pdfsig(folder: Path, pdf: bytes, root_pem: bytes | None) -> str:
    (folder / "record.pdf").write_bytes(pdf)
    (folder / "nss").mkdir()
    store = ["-d", f"sql:{folder / 'nss'}"]
    subprocess.run(["certutil", "-N", *store, "--empty-password"], check=True, capture_output=True)
    if root_pem is not None:
        (folder / "root.pem").write_bytes(root_pem)
        add = ["certutil", "-A", *store, "-n", "records-root", "-t", "CT,C,C", "-i", str(folder / "root.pem")]
        subprocess.run(add, check=True, capture_output=True)
    command = ["pdfsig", "-nssdir", f"sql:{folder / 'nss'}", str(folder / "record.pdf")]
    return subprocess.run(command, capture_output=True, text=True, check=False, env={"TZ": "UTC"}).stdout


def test_pdfsig_calls_the_seal_valid_and_under_our_root_trusted(
    sealed: bytes, keys: SealingKeys, tmp_path: Path
) -> None:
    said = pdfsig(tmp_path, sealed, keys.root_pem)
    assert "Signature Validation: Signature is Valid." in said
    assert "Certificate Validation: Certificate is Trusted." in said
    assert "Total document signed" in said
    assert "Not total document signed" not in said
    assert "Signature Type: ETSI.CAdES.detached" in said
    assert "Signing Time: Dec 01 2026 10:00:00" in said


def test_pdfsig_does_not_trust_it_under_another_root_and_sees_a_changed_byte(
    sealed: bytes, stranger: SealingKeys, tmp_path: Path
) -> None:
    for name in ("other", "changed"):
        (tmp_path / name).mkdir()
    said = pdfsig(tmp_path / "other", sealed, stranger.root_pem)
    assert "Signature is Valid." in said
    assert "Certificate is Trusted." not in said
    at = sealed.index(b"%PDF-1.7") + 12  # in the comment line after the header
    assert "Digest Mismatch." in pdfsig(tmp_path / "changed", sealed[:at] + b"X" + sealed[at + 1 :], None)


def test_openssl_verifies_the_container_over_the_covered_bytes(
    sealed: bytes, keys: SealingKeys, stranger: SealingKeys, tmp_path: Path
) -> None:
    start, end = container(sealed)
    held = bytes.fromhex(sealed[start + 1 : end - 1].decode())
    (tmp_path / "seal.der").write_bytes(cms.ContentInfo.load(held).dump())
    (tmp_path / "covered").write_bytes(sealed[:start] + sealed[end:])
    (tmp_path / "root.pem").write_bytes(keys.root_pem)
    (tmp_path / "other.pem").write_bytes(stranger.root_pem)
    command = ["openssl", "cms", "-verify", "-inform", "DER", "-in", "seal.der", "-content", "covered", "-binary"]
    at = ["-attime", str(int((sample.WHEN + timedelta(days=1)).timestamp())), "-purpose", "any", "-out", "out"]

    def verified(root: str) -> subprocess.CompletedProcess[str]:
        call = [*command, *at, "-CAfile", root, "-no-CApath"]
        return subprocess.run(call, capture_output=True, text=True, cwd=tmp_path, check=False)

    assert "CMS Verification successful" in verified("root.pem").stderr
    assert verified("other.pem").returncode != 0
    (tmp_path / "covered").write_bytes(sealed[:start] + sealed[end:] + b"\n")
    assert verified("root.pem").returncode != 0


def test_it_has_the_form_of_pades_b_b(sealed: bytes) -> None:
    """EN 319 142-1, 6.3: ETSI.CAdES.detached, signing-certificate-v2 inside, no signing-time attribute, /M set."""
    reader = pypdf.PdfReader(io.BytesIO(sealed))
    field = reader.trailer["/Root"]["/AcroForm"]["/Fields"][0].get_object()
    signature = field["/V"]
    assert signature["/SubFilter"] == "/ETSI.CAdES.detached"
    assert signature["/M"].startswith("D:20261201100000")
    assert signature["/Reference"][0]["/TransformParams"]["/P"] == 1  # ISO 32000-1, table 254: no changes
    assert field["/Rect"] == [0, 0, 0, 0]  # nothing is drawn
    signed = cms.ContentInfo.load(bytes(signature["/Contents"]), strict=False)["content"]
    attributes = {attribute["type"].native for attribute in signed["signer_infos"][0]["signed_attrs"]}
    assert {"content_type", "message_digest", "signing_certificate_v2"} <= attributes
    assert "signing_time" not in attributes
    assert len(signed["certificates"]) == 1  # the root is not embedded


def test_the_file_stays_pdf_1_7_and_its_metadata_as_rendered(unsealed: bytes, sealed: bytes, tmp_path: Path) -> None:
    assert sealed.startswith(unsealed)
    (tmp_path / "record.pdf").write_bytes(sealed)
    done = subprocess.run(["qpdf", "--check", "record.pdf"], capture_output=True, text=True, cwd=tmp_path, check=False)
    assert "No syntax or stream encoding errors found" in done.stdout
    with pikepdf.open(io.BytesIO(unsealed)) as before, pikepdf.open(io.BytesIO(sealed)) as after:
        assert after.pdf_version == "1.7"
        assert "/Version" not in after.Root
        assert after.Root.Metadata.read_bytes() == before.Root.Metadata.read_bytes()
        assert dict(after.docinfo) == dict(before.docinfo)


def test_without_its_seal_the_sealed_file_is_still_pdfa(sealed: bytes, tmp_path: Path) -> None:
    """The checker knows no signed files at all; this shows that sealing left everything else in order (19005-3)."""
    with pikepdf.open(io.BytesIO(sealed)) as file:
        for key in ("/AcroForm", "/Perms", "/Extensions"):
            del file.Root[key]
        for page in file.pages:
            if "/Annots" in page:
                del page["/Annots"]
        file.save(tmp_path / "stripped.pdf")
    result = pikepdf.pdfa.validate_written(tmp_path / "stripped.pdf", "3b")
    assert result.passed, result.findings


# What our check says of a sound file


def test_an_untouched_record_is_intact_and_trusted(sealed: bytes, keys: SealingKeys) -> None:
    report = check(sealed, keys.root_pem)
    assert report.state == "intact_trusted"
    assert report.intact
    assert report.sentence == "The file is exactly as Invented Workshop sealed it on 2026-12-01, under the root given."
    assert report.signer == "Invented Workshop"
    assert report.signer_fingerprint == sealing.fingerprint(keys.seal)
    assert report.signed_at == sample.WHEN


def test_the_attached_data_come_back_byte_for_byte(sealed: bytes, keys: SealingKeys) -> None:
    expected = {name: content for name, content, _, _ in sample.ATTACHMENTS}
    assert dict(check(sealed, keys.root_pem).attachments) == expected
    assert {name: held[0] for name, held in pypdf.PdfReader(io.BytesIO(sealed)).attachments.items()} == expected


def test_the_file_alone_shows_that_it_is_intact_but_not_by_whom(sealed: bytes, keys: SealingKeys) -> None:
    report = check(sealed, None)
    assert (report.state, report.sentence) == ("intact_unknown_signer", sealcheck.UNKNOWN_ROOT)
    assert report.signer_fingerprint == sealing.fingerprint(keys.seal)


def test_a_record_still_verifies_when_the_seal_has_run_out(unsealed: bytes, tmp_path: Path) -> None:
    old = sealing.create_sealing_keys(tmp_path, "Invented Workshop", datetime(1990, 1, 1, tzinfo=UTC))
    assert old.seal.not_valid_after_utc < datetime.now(UTC)
    report = check(seal(unsealed, old, datetime(1991, 1, 1, tzinfo=UTC)), old.root_pem)
    assert report.state == "intact_trusted"


# Attacks: each with the sentence it must meet


def incremental(change: Callable[[IncrementalPdfFileWriter], None]) -> Callable[[bytes], bytes]:
    def attack(pdf: bytes) -> bytes:
        writer = IncrementalPdfFileWriter(io.BytesIO(pdf))
        change(writer)
        out = io.BytesIO()
        writer.write(out)
        return out.getvalue()

    return attack


def other_language(writer: IncrementalPdfFileWriter) -> None:
    writer.root["/Lang"] = generic.pdf_string("de")
    writer.update_root()


def other_page(writer: IncrementalPdfFileWriter) -> None:
    page = writer.root["/Pages"]["/Kids"].raw_get(0).get_object()
    page["/Contents"] = writer.add_object(generic.StreamObject(stream_data=b"q Q"))
    writer.update_container(page)


def other_attachment(writer: IncrementalPdfFileWriter) -> None:
    entry = writer.root["/AF"].raw_get(1).get_object()
    entry["/EF"]["/F"] = writer.add_object(generic.StreamObject(stream_data=b"{}"))
    writer.update_container(entry)


def saved_again(pdf: bytes) -> bytes:
    out = io.BytesIO()
    with pikepdf.open(io.BytesIO(pdf)) as file:
        file.save(out)
    return out.getvalue()


def in_container(change: Callable[[bytes], bytes]) -> Callable[[bytes], bytes]:
    """Attack on the bytes that the seal does not cover; `change` gets the hex digits and keeps their number."""

    def attack(pdf: bytes) -> bytes:
        start, end = container(pdf)
        digits = pdf[start + 1 : end - 1]
        changed = change(digits)
        assert len(changed) == len(digits)
        assert changed != digits
        return pdf[: start + 1] + changed + pdf[end - 1 :]

    return attack


def with_cms(change: Callable[[cms.ContentInfo], None]) -> Callable[[bytes], bytes]:
    def rewritten(digits: bytes) -> bytes:
        content = cms.ContentInfo.load(bytes.fromhex(digits.decode()), strict=False)
        change(content)
        return content.dump(force=True).hex().upper().encode().ljust(len(digits), b"0")

    return in_container(rewritten)


def unsigned_attribute(content: cms.ContentInfo) -> None:
    signer = content["content"]["signer_infos"][0]
    signer["unsigned_attrs"] = cms.CMSAttributes([cms.CMSAttribute({"type": "content_type", "values": ["data"]})])


def zeros_turned(digits: bytes) -> bytes:
    return digits[:-1] + b"1"


def mixed_case(digits: bytes) -> bytes:
    at = next(i for i, digit in enumerate(digits) if digit in b"ABCDEF")
    return digits[:at] + digits[at : at + 1].lower() + digits[at + 1 :]


def signature_bit(content: cms.ContentInfo) -> None:
    signer = content["content"]["signer_infos"][0]
    value = bytearray(signer["signature"].native)
    value[100] ^= 1
    signer["signature"] = bytes(value)


ATTACKS: dict[str, tuple[Callable[[bytes], bytes], str]] = {
    "junk after the end": (lambda pdf: pdf + b"junk", sealcheck.ADDED),
    "one newline after the end": (lambda pdf: pdf + b"\n", sealcheck.ADDED),
    "incremental: language": (incremental(other_language), sealcheck.ADDED),
    "incremental: page": (incremental(other_page), sealcheck.ADDED),
    "incremental: attachment": (incremental(other_attachment), sealcheck.ADDED),
    "cut by one byte": (lambda pdf: pdf[:-1], sealcheck.DAMAGED),
    "cut by two hundred bytes": (lambda pdf: pdf[:-200], sealcheck.DAMAGED),
    "cut in half": (lambda pdf: pdf[: len(pdf) // 2], sealcheck.DAMAGED),
    "a byte before the start": (lambda pdf: b"\n" + pdf, sealcheck.NOT_A_PDF),
    "empty": (lambda pdf: b"", sealcheck.NOT_A_PDF),
    "saved again": (saved_again, sealcheck.CHANGED),
    "content byte": (lambda pdf: pdf[:14] + b"X" + pdf[15:], sealcheck.CHANGED),
    "seal field unnamed": (lambda pdf: pdf.replace(b"/FT /Sig", b"/FT /Sog"), sealcheck.SEAL_GONE),
    "padding turned": (in_container(zeros_turned), sealcheck.SEAL_CHANGED),
    "hex in two cases": (in_container(mixed_case), sealcheck.SEAL_CHANGED),
    "signature bit": (with_cms(signature_bit), sealcheck.SEAL_CHANGED),
    "hex in lower case": (in_container(bytes.lower), sealcheck.SEAL_CHANGED),
    "unsigned attribute": (with_cms(unsigned_attribute), sealcheck.NOT_OURS),
}


@pytest.mark.parametrize("name", ATTACKS)
def test_an_attack_is_named_in_one_sentence(name: str, sealed: bytes, keys: SealingKeys) -> None:
    attack, sentence = ATTACKS[name]
    attacked = attack(sealed)
    assert attacked != sealed
    report = check(attacked, keys.root_pem)
    assert (report.state, report.sentence) == ("altered", sentence)
    assert not report.attachments


def test_a_seal_that_carries_its_root_along_is_not_of_our_kind(unsealed: bytes, keys: SealingKeys) -> None:
    signer = sealer._signer(keys)
    signer.embed_roots = True
    signer.cert_registry.register(asn1_x509.Certificate.load(asn1_pem.unarmor(keys.root_pem)[2]))
    out = io.BytesIO()
    sealing_writer = sealer._QuietWriter(io.BytesIO(unsealed))
    meta = signers.PdfSignatureMetadata(field_name="RecordSeal", subfilter=fields.SigSeedSubFilter.PADES)
    apart(sealer._DatedSigner(meta, signer, sample.WHEN).sign_pdf, sealing_writer, output=out)
    assert check(out.getvalue(), keys.root_pem).sentence == sealcheck.NOT_OURS


def flipped(pdf: bytes, count: int, start: int, end: int) -> list[tuple[int, bytes]]:
    """`count` copies with one bit turned, at places drawn evenly from [start, end); the same ones every run."""
    chance = random.Random(20261201)
    made = []
    for _ in range(count):
        at = chance.randrange(start, end)
        made.append((at, pdf[:at] + bytes([pdf[at] ^ (1 << chance.randrange(8))]) + pdf[at + 1 :]))
    return made


@pytest.mark.parametrize("count", [30, pytest.param(300, marks=pytest.mark.full)])
def test_every_flipped_bit_is_caught(count: int, sealed: bytes, keys: SealingKeys) -> None:
    """As many across the file as inside the container, where a library's own verdict misses about half."""
    copies = flipped(sealed, count, 0, len(sealed)) + flipped(sealed, count, *container(sealed))
    assert len(copies) == 2 * count
    missed = [at for at, copy in copies if check(copy, keys.root_pem).state != "altered"]
    assert missed == []


def test_a_seal_made_under_another_root_is_intact_but_anybodys(
    unsealed: bytes, sealed: bytes, keys: SealingKeys, stranger: SealingKeys
) -> None:
    resealed = seal(unsealed, stranger, sample.WHEN)
    report = check(resealed, keys.root_pem)
    assert (report.state, report.sentence) == ("intact_unknown_signer", sealcheck.FOREIGN)
    assert report.signer == "Invented Workshop"  # the name proves nothing; the fingerprint differs
    assert report.signer_fingerprint != sealing.fingerprint(keys.seal)
    assert check(sealed, stranger.root_pem).sentence == sealcheck.FOREIGN


def test_the_revision_before_the_seal_has_none(unsealed: bytes, keys: SealingKeys) -> None:
    report = check(unsealed, keys.root_pem)
    assert (report.state, report.sentence) == ("no_seal", sealcheck.NO_SEAL)
    assert not report.attachments


def test_two_seals_are_one_too_many(unsealed: bytes, keys: SealingKeys) -> None:
    pdf = unsealed
    for name in ("One", "Two"):
        meta = signers.PdfSignatureMetadata(field_name=name, subfilter=fields.SigSeedSubFilter.PADES)
        out = io.BytesIO()
        signer = signers.PdfSigner(meta, signer=sealer._signer(keys))
        apart(signer.sign_pdf, IncrementalPdfFileWriter(io.BytesIO(pdf)), output=out)
        pdf = out.getvalue()
    assert check(pdf, keys.root_pem).sentence == sealcheck.SEVERAL


def test_a_trust_root_that_is_none_is_the_callers_mistake(sealed: bytes) -> None:
    for wrong in (b"", b"text", b"-----BEGIN PUBLIC KEY-----\nAAAA\n-----END PUBLIC KEY-----\n"):
        with pytest.raises(ValueError, match="not a PEM certificate"):
            check(sealed, wrong)


# What sealing refuses


def test_a_sealed_file_is_not_sealed_again(sealed: bytes, keys: SealingKeys) -> None:
    with pytest.raises(FieldcheckError, match="sealed already"):
        seal(sealed, keys, sample.WHEN)


def test_a_time_outside_the_certificate_is_refused(unsealed: bytes, keys: SealingKeys) -> None:
    for when in (sample.WHEN - timedelta(seconds=1), sample.WHEN + timedelta(days=31 * 365)):
        with pytest.raises(FieldcheckError, match="not valid at this time"):
            seal(unsealed, keys, when)
