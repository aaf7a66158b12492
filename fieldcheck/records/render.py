"""The child process of `pdf.render`: reads an order on stdin, writes an error or a PDF/A-3b on stdout.

It locks itself before it touches the document: limits on memory, time and file size, then an audit hook that
refuses sockets, processes and every file but Python's own and the order's temporary folder. The document's
references are served from the order's assets alone, so the hook is the second lock, not the first.
"""

from __future__ import annotations

import html
import json
import logging
import mimetypes
import os
import pickle
import re
import resource
import sys
import sysconfig
import tempfile
import warnings
from pathlib import Path
from typing import Any

from fieldcheck.engine.errors import FieldcheckError
from fieldcheck.records import typefaces
from fieldcheck.records.pdf import Attachment, Order

MEMORY_BYTES = 1 << 30  # a record with a dozen large photographs peaked at a third of this
LARGEST_FILE_BYTES = 256 << 20
LARGEST_PICTURE_PIXELS = 50_000_000
PRINT_DPI, JPEG_QUALITY = 200, 80
PANGO_MEND = "apt-get install -y --no-install-recommends libpangoft2-1.0-0 libharfbuzz-subset0"
# PDF/A-3 forbids /Interpolate true on images (ISO 19005-3, 6.2.8), which the renderer writes for smooth scaling.
SHARP_PICTURES = "*, *::before, *::after { image-rendering: crisp-edges !important }"
_REFUSED_EVENTS = ("socket.", "subprocess.", "os.system", "os.exec", "os.fork", "os.posix_spawn", "os.spawn", "ftplib.")
_MEDIA_TYPE = re.compile(r"[a-z]+/[a-z0-9][a-z0-9.+-]*", re.ASCII)


def main() -> int:
    """Exit code 0 whenever an answer was written, an error's too."""
    answer = os.fdopen(os.dup(1), "wb")
    os.dup2(2, 1)  # libraries print to stdout when they are unhappy; that must not end up in the PDF
    problem, pdf = None, b""
    try:
        order = pickle.loads(sys.stdin.buffer.read())  # from our own parent
        limit_resources(order.timeout_s)
        pdf = draw(order)
    except FieldcheckError as error:
        problem = error
    except MemoryError:
        problem = FieldcheckError("the document needs too much memory to draw", "", "use fewer or smaller pictures")
    except RecursionError:
        problem = FieldcheckError("the document is nested too deeply to draw", "", "use fewer elements inside others")
    head = {} if problem is None else problem.as_dict()
    answer.write(json.dumps(head).encode() + b"\n" + pdf)
    answer.close()
    return 0


def limit_resources(seconds: float) -> None:
    """Memory, processor time and file size of this process, for good."""
    processor = int(seconds) + 1
    resource.setrlimit(resource.RLIMIT_AS, (MEMORY_BYTES, MEMORY_BYTES))
    resource.setrlimit(resource.RLIMIT_CPU, (processor, processor))
    resource.setrlimit(resource.RLIMIT_FSIZE, (LARGEST_FILE_BYTES, LARGEST_FILE_BYTES))
    resource.setrlimit(resource.RLIMIT_CORE, (0, 0))


def lock(libraries: list[Path]) -> None:
    """From here on Python opens no socket, starts no process, and opens only files below these folders, below
    Python's own and below the temporary folder. An audit hook (PEP 578) cannot be taken off again."""
    paths = sysconfig.get_paths()
    folders = [paths["stdlib"], paths["platstdlib"], paths["purelib"], paths["platlib"], tempfile.gettempdir()]
    allowed = tuple(os.path.realpath(folder) + os.sep for folder in [*folders, *map(str, libraries)])

    def refuse(event: str, details: tuple[Any, ...]) -> None:
        if event.startswith(_REFUSED_EVENTS):
            raise PermissionError(f"drawing a document does not allow {event}")
        if event == "open" and isinstance(details[0], str | bytes):
            path = os.path.realpath(os.fsdecode(details[0]))
            if not (path + os.sep).startswith(allowed):
                raise PermissionError(f"drawing a document does not allow opening {path}")

    sys.addaudithook(refuse)


def draw(order: Order) -> bytes:
    """The PDF. Raises FieldcheckError as `pdf.render` says."""
    _check_characters(order)
    weasyprint = _weasyprint()
    lock([typefaces.FOLDER.parents[1], Path(weasyprint.__file__).parents[1]])
    complaints = _Complaints()
    logger = logging.getLogger("weasyprint")
    logger.addHandler(complaints)
    logger.propagate = False
    fetcher = _closed_fetcher(weasyprint, order.assets)
    sheet = f"{typefaces.face_rules()}\n{SHARP_PICTURES}\n{order.css}"
    fonts = weasyprint.text.fonts.FontConfiguration()
    style = weasyprint.CSS(string=sheet, base_url="asset:", url_fetcher=fetcher, font_config=fonts)
    source = weasyprint.HTML(string=order.html, base_url="asset:", url_fetcher=fetcher)
    document = source.render(
        font_config=fonts,
        stylesheets=[style],
        optimize_images=True,
        dpi=PRINT_DPI,
        jpeg_quality=JPEG_QUALITY,
        pdf_variant="pdf/a-3b",
        pdf_tags=True,
    )
    stated = order.when.strftime("%Y-%m-%dT%H:%M:%SZ")
    document.metadata.created = document.metadata.modified = stated
    pdf: bytes = document.write_pdf(
        finisher=lambda _, file: _finish(file, order.attachments),
        attachments=[_attachment(weasyprint, one, order) for one in order.attachments],
        optimize_images=True,
        dpi=PRINT_DPI,
        jpeg_quality=JPEG_QUALITY,
        pdf_variant="pdf/a-3b",
        pdf_tags=True,
    )
    complaints.raise_first(fetcher.refused)
    return pdf


def _check_characters(order: Order) -> None:
    texts = [("document", html.unescape(order.html)), ("style sheet", order.css)]
    texts += [(name, data.decode("utf-8", "replace")) for name, data in order.assets.items() if name.endswith(".svg")]
    for where, text in texts:
        missing = typefaces.uncovered(text)
        if missing:
            points = ", ".join([f"U+{ord(character):04X}" for character in missing[:5]])
            raise FieldcheckError(f"no bundled face draws {points}", where, "pass the text through printable()")


def _weasyprint() -> Any:  # the library ships no types
    try:
        import weasyprint
        import weasyprint.text.fonts
    except OSError as error:
        raise FieldcheckError("Pango, which sets the text of records, is not installed", "", PANGO_MEND) from error
    from PIL import Image

    Image.MAX_IMAGE_PIXELS = LARGEST_PICTURE_PIXELS
    warnings.simplefilter("error", Image.DecompressionBombWarning)
    mimetypes.init(files=[])  # the machine's own table would differ from one machine to the next
    return weasyprint


class _Complaints(logging.Handler):
    """Keeps what the renderer reports as an error: a record must not silently lack a picture."""

    def __init__(self) -> None:
        super().__init__(logging.ERROR)
        self.texts: list[str] = []

    def emit(self, record: logging.LogRecord) -> None:
        self.texts.append(record.getMessage())

    def raise_first(self, refused: list[str]) -> None:
        """Raises FieldcheckError for the first refused reference, else for the first complaint, if any."""
        if refused:
            raise FieldcheckError(
                "the document asks for something that is not among its assets", refused[0], "refer to asset:NAME alone"
            )
        if self.texts:
            raise FieldcheckError("the document cannot be drawn as written", "", self.texts[0])


def _closed_fetcher(weasyprint: Any, assets: Any) -> Any:
    """Serves `asset:` names from memory and nothing else; the renderer's own fetcher would read any local file."""
    from weasyprint.urls import URLFetcher, URLFetcherResponse

    class ClosedFetcher(URLFetcher):  # type: ignore[misc]  # the library ships no types
        def __init__(self) -> None:
            super().__init__(allowed_protocols=())
            self.refused: list[str] = []

        def fetch(self, url: str, headers: Any = None) -> Any:
            name = url.removeprefix("asset:")
            content = None if name == url else _asset(name, assets)
            if content is None:
                self.refused.append(url)
                raise ValueError("not among the document's assets")
            kind = mimetypes.guess_type(name, strict=True)[0] or "application/octet-stream"
            return URLFetcherResponse(url, content, {"Content-Type": kind})

    return ClosedFetcher()


def _asset(name: str, assets: Any) -> bytes | None:
    for _, _, _, file in typefaces.FACES:
        if name == f"fonts/{file}":
            return (typefaces.FOLDER / file).read_bytes()
    found: bytes | None = assets.get(name)
    return found


def _attachment(weasyprint: Any, attachment: Attachment, order: Order) -> Any:
    return weasyprint.Attachment(
        string=attachment.content,
        name=attachment.name,
        description=attachment.description,
        created=order.when,
        modified=order.when,
        relationship="Data",
    )


def _finish(file: Any, attachments: tuple[Attachment, ...]) -> None:
    """Put right what the renderer leaves behind, before the trailer is written.

    Empty /Pattern and /Shading dictionaries keep the PDF/A checker from looking further; every attachment is
    listed twice in /AF; and the media type was guessed from the name.
    """
    media = {attachment.name: attachment.mime for attachment in attachments}
    for thing in file.objects:
        resources = thing.extra.get("Resources", {}) if hasattr(thing, "extra") else thing
        if not isinstance(resources, dict):
            continue
        for key in ("Pattern", "Shading"):
            if key in resources and resources[key] == {}:
                del resources[key]
        if resources.get("Type") == "/Filespec":
            _state_media_type(file, resources, media)
    if "AF" in file.catalog:
        file.catalog["AF"][:] = list(dict.fromkeys(file.catalog["AF"]))


def _state_media_type(file: Any, entry: Any, media: dict[str, str]) -> None:
    kind = media[entry["UF"].string]
    if not _MEDIA_TYPE.fullmatch(kind):
        raise FieldcheckError(f'"{kind}" is not a media type', entry["UF"].string, 'write it as "application/json"')
    stream = file.objects[int(entry["EF"]["F"].split()[0])]
    stream.extra["Subtype"] = "/" + kind.replace("/", "#2f").replace("+", "#2b")


if __name__ == "__main__":
    sys.exit(main())
