"""Starts the phone."""

import sys

from browser import document, html, window


class Faults:
    """Takes the place of sys.stderr: Brython writes there the traceback of whatever was not caught."""

    def write(self, text):
        window.fieldcheckFailed(text)

    def flush(self):
        pass


def start():
    sys.stderr = Faults()
    document.body <= html.MAIN(html.H1("fieldcheck"))
