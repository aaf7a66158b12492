"""How a view reaches the open workshop."""

from __future__ import annotations

from typing import cast

from flask import current_app

from fieldcheck.desk.workshop import Workshop

KEY = "fieldcheck workshop"


def workshop() -> Workshop:
    """The workshop of the application that answers now."""
    return cast(Workshop, current_app.extensions[KEY])
