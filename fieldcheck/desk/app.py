"""Makes the application: one workshop, its blueprints, the guard around them."""

from __future__ import annotations

from pathlib import Path

from flask import Flask
from jinja2 import StrictUndefined

from fieldcheck import rulebook as rules
from fieldcheck.desk import answers, api, guard, phone
from fieldcheck.desk.shared import KEY
from fieldcheck.desk.workshop import Rulebook, Workshop, open_journal

BLUEPRINTS = (api.bp, phone.bp)


def create_app(data: Path, rulebook: Rulebook | None = None, phone_files: Path | None = None) -> Flask:
    """The desk of the workshop in the folder `data`, which is made when it is new.

    rulebook: compiled already, else the one that ships with the program.  phone_files: a phone built elsewhere.
    Refuses (FieldcheckError) a damaged journal or rulebook.
    """
    app = Flask("fieldcheck.desk", static_folder="static", template_folder="templates")
    app.jinja_env.undefined = StrictUndefined
    app.jinja_env.trim_blocks = app.jinja_env.lstrip_blocks = True
    app.config[phone.KEY] = phone_files or phone.folder()
    compiled = rulebook or rules.load(rules.rules_folder())
    app.extensions[KEY] = Workshop(open_journal(data), compiled)
    guard.install(app)
    answers.install(app)
    for blueprint in BLUEPRINTS:
        app.register_blueprint(blueprint)
    return app
