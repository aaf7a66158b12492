"""The reference tests and this folder on the import path: mutants are caught by the very checks that stand there."""

import sys
from pathlib import Path

HERE = Path(__file__).resolve().parent
for folder in (HERE, HERE.parent / "references", HERE.parent / "engine"):
    if str(folder) not in sys.path:
        sys.path.insert(0, str(folder))
