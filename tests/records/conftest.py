"""One trial job and its record for all tests of this folder that ask for them."""

from __future__ import annotations

import io
import json
from dataclasses import dataclass

import pikepdf
import pypdf
import pytest
import trial_job
from trial_job import Trial

from fieldcheck.records import data as record_data
from fieldcheck.records import make
from fieldcheck.records.make import RecordFile


@dataclass(frozen=True)
class Made:
    """A trial, its record, the data attached, and the pages' text as an outside reader has it, without white space."""

    trial: Trial
    record: RecordFile
    attached: bytes
    text: str


def text_of(pdf: bytes) -> str:
    """All that the pages say, as pypdf reads it in the order in which it was set, white space taken out."""
    return "".join("".join(page.extract_text().split()) for page in pypdf.PdfReader(io.BytesIO(pdf)).pages)


def make_record(trial: Trial) -> Made:
    """The record of a trial's job, read back."""
    record = make.make(trial.journal, trial.job, trial.keys, trial.tick())
    with pikepdf.open(io.BytesIO(record.pdf)) as document:
        attached = document.attachments[record_data.NAME].get_file().read_bytes()
    return Made(trial, record, attached, text_of(record.pdf))


@pytest.fixture(scope="session")
def made(tmp_path_factory: pytest.TempPathFactory) -> Made:
    """The record of the trial job, point as decimal mark."""
    folder = tmp_path_factory.mktemp("workshop")
    return make_record(trial_job.full_job(folder))


@pytest.fixture(scope="session")
def made_comma(tmp_path_factory: pytest.TempPathFactory) -> Made:
    """The same for a customer who reads a comma."""
    folder = tmp_path_factory.mktemp("comma")
    return make_record(trial_job.full_job(folder, "comma"))


@pytest.fixture(scope="session")
def unsealed(made: Made) -> bytes:
    """The same pages with the same data attached, not sealed."""
    return make.unsealed(json.loads(made.attached), made.trial.journal, trial_job.START)
