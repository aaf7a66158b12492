"""Runs a call in a thread of its own: pyHanko starts an event loop, which a thread that has one already refuses."""

from __future__ import annotations

from collections.abc import Callable
from concurrent.futures import ThreadPoolExecutor
from typing import ParamSpec, TypeVar

Given = ParamSpec("Given")
Result = TypeVar("Result")


def apart(call: Callable[Given, Result], *args: Given.args, **kwargs: Given.kwargs) -> Result:
    """What `call` returns or raises."""
    with ThreadPoolExecutor(max_workers=1) as pool:
        return pool.submit(call, *args, **kwargs).result()
