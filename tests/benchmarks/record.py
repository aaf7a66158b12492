"""A record of twelve pages against bare WeasyPrint of the same HTML, both in a fresh process, sealing apart.

The document is the real one of a job with several items, photographs and all, as fieldcheck.records sets it. Ours
is `pdf.render`: a child process locked away, every character checked, the data attached. Bare is a child process that
imports WeasyPrint and writes the same HTML with the same style sheet, faces, pictures and kind of PDF. Both run on
one core, so seconds of processor say what a quiet machine would take; waiting for a busy one is left out.
"""

from __future__ import annotations

import io
import pickle
import subprocess
import sys
import tempfile
from functools import partial
from pathlib import Path

import pikepdf
from benchmarks.ratios import ROUNDS, Row, at_most, paired, processor
from trial_job import Trial, worked_item

from fieldcheck.journal.hashing import sha256
from fieldcheck.records import data as record_data
from fieldcheck.records import document, html, pdf, typefaces

PAGES = 12
ITEMS, MOST_ITEMS = 4, 12       # of the job: so many fill the pages, tried from the first on
MOST = 1.15
BARE = """
import pickle, sys
from weasyprint import CSS, HTML
from weasyprint.text.fonts import FontConfiguration
text, sheet, folder, options = pickle.loads(sys.stdin.buffer.read())
fonts = FontConfiguration()
sheets = [CSS(string=sheet, base_url=folder, font_config=fonts)]
pdf = HTML(string=text, base_url=folder).write_pdf(stylesheets=sheets, font_config=fonts, **options)
sys.stdout.buffer.write(pdf)
"""
SAME_KIND = {"pdf_variant": "pdf/a-3b", "pdf_tags": True, "optimize_images": True, "dpi": 200, "jpeg_quality": 80}


def job_of(folder: Path, items: int) -> Trial:
    """A signed job with so many items, each worked from as found to as left."""
    trial = Trial(folder)
    owner, site = trial.customer("Tidewater Model Club")
    gear = [trial.equipment(f"Reversing unit {n}", f"LL-{n:03d}", owner, site) for n in range(items)]
    trial.open_job("2026-0001", owner, site, gear)
    for item in trial.items:
        worked_item(trial, item)
    trial.write(trial.job, "customer.acknowledged", {"state": "not present", "name": ""})
    trial.sign()
    return trial


def page_of(trial: Trial) -> tuple[html.Page, bytes]:
    """(the document as HTML, the data to attach)."""
    head = trial.journal.tree_head()
    data = record_data.collect(trial.journal, trial.job, "R-2026-0001", trial.tick(), head, [], None)
    attached = record_data.dumps(data)
    made = document.build(data, sha256(attached))
    return html.page(made, {name: trial.journal.blob(name) for name in made.blobs()}), attached


def ours(trial: Trial, page: html.Page, attached: bytes) -> bytes:
    attachment = (record_data.NAME, attached, "the record's data", "application/json")
    return pdf.render(page.html, page.css, [attachment], trial.now, page.assets)


def bare(page: html.Page, folder: Path, options: dict[str, object]) -> bytes:
    """The same by WeasyPrint alone; its pictures and faces are files in `folder`."""
    sheet = typefaces.face_rules().replace("asset:fonts", typefaces.FOLDER.as_uri()) + page.css
    order = pickle.dumps((page.html.replace("asset:", ""), sheet, folder.as_uri() + "/", options))
    return subprocess.run([sys.executable, "-c", BARE], input=order, capture_output=True, check=True).stdout


def pages(made: bytes) -> int:
    with pikepdf.open(io.BytesIO(made)) as document:
        return len(document.pages)


def long_enough(folder: Path, least: int) -> tuple[Trial, html.Page, bytes, int]:
    """The job with the fewest items whose record has so many pages: (job, document, data, pages)."""
    for items in range(1 if least == 1 else ITEMS, MOST_ITEMS):
        trial = job_of(folder / f"workshop {items}", items)
        page, attached = page_of(trial)
        count = pages(ours(trial, page, attached))
        if count >= least:
            return trial, page, attached, count
    raise AssertionError(f"{MOST_ITEMS} items do not fill {least} pages")


def rows(tiny: bool = False) -> list[Row]:
    rounds = 1 if tiny else ROUNDS
    with tempfile.TemporaryDirectory() as made:
        folder = Path(made)
        trial, page, attached, count = long_enough(folder, 1 if tiny else PAGES)
        for name, content in page.assets.items():
            (folder / name).write_bytes(content)
        record = partial(ours, trial, page, attached)
        assert count == pages(bare(page, folder, SAME_KIND)), "both set the same pages"
        same = paired(record, partial(bare, page, folder, SAME_KIND), rounds, clock=processor)
        plain = paired(record, partial(bare, page, folder, {}), rounds, clock=processor)
    name = f"record of {count} pages, unsealed"
    return [
        at_most(f"{name} / bare WeasyPrint, PDF/A-3b too", same, MOST, 1.0, "s of processor"),
        Row(f"{name} / bare WeasyPrint, plain PDF", plain.figure(1.0, "s of processor")),
    ]
