"""Private files: written once, whole, readable by their owner alone."""

from __future__ import annotations

import os
import stat
from pathlib import Path

from fieldcheck.engine.errors import FieldcheckError

PRIVATE_FOLDER = 0o700
PRIVATE_FILE = 0o600


def private_folder(folder: Path) -> Path:
    """Make `folder` with its parents if needed and close it (0700) to everyone but its owner."""
    folder.mkdir(mode=PRIVATE_FOLDER, parents=True, exist_ok=True)
    folder.chmod(PRIVATE_FOLDER)  # mkdir obeys the umask and leaves an existing folder as it is
    return folder


def write_private(path: Path, data: bytes) -> None:
    """Write `data` to a new file (0600) and to disk. Raises FileExistsError rather than replace a key."""
    handle = os.open(path, os.O_WRONLY | os.O_CREAT | os.O_EXCL, PRIVATE_FILE)
    with os.fdopen(handle, "wb") as file:
        file.write(data)
        file.flush()
        os.fsync(file.fileno())


def read_private(path: Path) -> bytes:
    """The bytes of a key file. Raises FieldcheckError when it is missing or open to other users of the machine."""
    try:
        mode = path.stat().st_mode
        data = path.read_bytes()
    except OSError as error:
        raise FieldcheckError("a key file cannot be read", str(path), error.strerror or "") from error
    if stat.S_IMODE(mode) & 0o077:
        raise FieldcheckError("other users of this machine can reach a key file", str(path), f"chmod 600 {path}")
    return data
