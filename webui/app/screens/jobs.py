"""The list of jobs, and who works here."""

from browser import window

from .. import dom, store
from ..markup import NOTHING, h, key, link
from ..screen import Screen


def site_text(job):
    """Where a job is: the site's and the customer's name as far as they are known."""
    data = job.opened.data
    site = store.state.workshop.get("site", data["site"])
    customer = store.state.workshop.get("customer", data["customer"])
    names = [one["name"] for one in (site, customer) if one is not None]
    return ", ".join(names)


def count_text(number, one, many):
    """"1 item", "3 items"."""
    return str(number) + " " + (one if number == 1 else many)


class Jobs(Screen):
    """Every job that is not signed first, then the rest."""

    name = "Jobs"

    def body(self):
        jobs = [job for job in store.state.jobs.values() if job.opened is not None]
        jobs.sort(key=_by_number)
        open_jobs = [job for job in jobs if job.signing() is None]
        done = [job for job in jobs if job.signing() is not None]
        person = store.person_name(store.own["person"])
        return h("div.screen", h("h1", "Jobs"),
                 h("p.who", link(person or "Who works here?", ["who"], "plain")),
                 self._list(open_jobs) if open_jobs else h("p", self._empty()),
                 [h("h2", "Signed"), self._list(done)] if done else NOTHING)

    def _empty(self):
        if store.state.workshop.entries["person"]:
            return "No job is open. Open one at the desk and hand it to this phone."
        return "Nothing has come from the desk yet. Start the desk and leave this page open."

    def _list(self, jobs):
        rows = []
        for job in jobs:
            where = site_text(job)
            items = job.items_in_order()
            rows.append(h("li", link([h("span.number", job.opened.data["number"]), h("span.where", where),
                                      h("span.note", count_text(len(items), "item", "items"))],
                                     ["job", job.id])))
        return h("ul.rows", rows)


def _by_number(job):
    return job.opened.data["number"]


class Who(Screen):
    """Who works with this phone now; every event names them."""

    name = "Who works here?"

    def body(self):
        rows = []
        for person in store.state.workshop.all("person"):
            if person.get("active", True):
                skills = ", ".join(person.get("competences") or [])
                rows.append(h("li", key([h("span.where", person["name"]), h("span.note", skills)], "choose",
                                        person["person"], "row")))
        return h("div.screen", h("h1", "Who works here?"),
                 h("ul.rows", rows) if rows else h("p", "No person has been entered at the desk yet."))

    async def on_choose(self, person):
        await window.platform.putSetting("person", person)
        store.own["person"] = person
        dom.go("#/", True)
