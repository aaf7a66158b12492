"""Serves the small rulebook's desk in a process of its own: `python serving.py FOLDER`; prints its address."""

import sys
from pathlib import Path

from small_rulebook import small_rulebook

from fieldcheck.desk.server import serve

if __name__ == "__main__":
    serve(Path(sys.argv[1]), int(sys.argv[2]), lambda address: print(address, flush=True), small_rulebook())
