"""Makes the application: one workshop, its blueprints, the guard around them."""

from __future__ import annotations

from pathlib import Path

from flask import Flask
from jinja2 import StrictUndefined

from fieldcheck import rulebook as rules
from fieldcheck.desk import (
    answers,
    api,
    customers,
    equipment,
    guard,
    home,
    jobs,
    lubricants,
    meters,
    persons,
    phone,
    records,
    sites,
)
from fieldcheck.desk.shared import KEY
from fieldcheck.desk.workshop import Rulebook, Workshop, open_journal

BLUEPRINTS = (api.bp, phone.bp, home.bp, jobs.bp, equipment.bp, sites.bp, customers.bp, persons.bp, meters.bp,
              lubricants.bp, records.bp)
ROOMS = (("/", "Desk"), ("/jobs/", "Jobs"), ("/equipment/", "Equipment"), ("/sites/", "Sites"),
         ("/customers/", "Customers"), ("/persons/", "Persons"), ("/meters/", "Meters"),
         ("/lubricants/", "Lubricants"), ("/records/", "Records"), ("/workshop", "Workshop"))


def create_app(data: Path, rulebook: Rulebook | None = None, phone_files: Path | None = None) -> Flask:
    """The desk of the workshop in the folder `data`, which is made when it is new.

    rulebook: compiled already, else the one that ships with the program.  phone_files: a phone built elsewhere.
    Refuses (FieldcheckError) a damaged journal or rulebook.
    """
    app = Flask("fieldcheck.desk", static_folder="static", template_folder="templates")
    app.jinja_env.undefined = StrictUndefined
    app.jinja_env.trim_blocks = app.jinja_env.lstrip_blocks = True
    app.jinja_env.globals["rooms"] = ROOMS
    app.config[phone.KEY] = phone_files or phone.folder()
    compiled = rulebook or rules.load(rules.rules_folder())
    app.extensions[KEY] = Workshop(open_journal(data), compiled)
    guard.install(app)
    answers.install(app)
    for blueprint in BLUEPRINTS:
        app.register_blueprint(blueprint)
    return app
