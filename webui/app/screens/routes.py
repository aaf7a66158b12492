"""Which screen an address means."""

from browser import window

from .. import store
from . import added, gates, job, left, outcome, photo, sequence, shelf, signature, simple, timing, waiting
from . import bench as bench_room
from .measure import Measure
from .missing import Missing

platform = window.platform
KINDS = {"confirm": simple.Confirm, "choice": simple.Choice, "note": simple.Note, "action": simple.Action,
         "measure": Measure, "table": Measure, "sequence": sequence.Sequence, "timing": timing.Timing,
         "photograph": photo.Photo}
ITEM_SCREENS = {"outcome": outcome.Outcome, "defect": outcome.Defect, "part": outcome.PartUsed,
                "wait": outcome.CoolDown}


async def screen_for(place):
    """The Screen of an address below #/job, or the address (text) to go to instead."""
    await waiting.load()
    if "meters" not in store.rules:
        store.rules["meters"] = await store.recall("meters used") or {}
    if place[0] != "job" or len(place) < 2:
        return "#/"
    found = store.state.jobs.get(place[1])
    if found is None or found.opened is None:
        return Missing(place, "This job is not on this phone.")
    if len(place) == 2:
        return job.Job(place, found, await bench_room.all_of(found))
    if place[2] in ("conditions", "customer", "sign", "add"):
        return await job_screen(place, found)
    return await item_screen(place, found)


async def job_screen(place, found):
    """A screen of the whole job."""
    if place[2] == "conditions":
        return gates.Conditions(place, found, False)
    if place[2] == "customer":
        return signature.Customer(place, found)
    if place[2] == "sign":
        return signature.Sign(place, found, await bench_room.all_of(found))
    index = await store.index(found.opened.data["rulebook"])
    if index is None:
        return Missing(place, "The rules of this job are not on this phone yet.")
    return added.Added(place, found, index)


async def item_screen(place, found):
    """A screen of one item."""
    bench = await bench_room.of(place[1], place[2])
    if bench is None:
        known = place[2] in found.items
        return Missing(place, "The rules of this item are not on this phone yet." if known
                       else "This item is not on this phone.")
    if len(place) == 3:
        return job.Item(place, bench)
    if place[3] in ITEM_SCREENS:
        return ITEM_SCREENS[place[3]](place, bench)
    if place[3] == "step" and len(place) > 4:
        return await step_screen(place, bench)
    return Missing(place, "There is no such screen.")


async def step_screen(place, bench):
    """A step, or what must come before it."""
    instance = bench.flow.find(place[4])
    if instance is None:
        return Missing(place, "This step is not on the path of this item now.")
    rest = place[5:]
    index = instance.missing[0] if instance.missing else instance.indexes[0]
    if rest[:1] == ["cell"] and len(rest) > 1:
        index = rest[1]
        rest = rest[2:]
    if rest == ["left"]:
        return left.Left(place, bench, instance, index)
    if instance.state == "to do" and instance.ready:
        gate = gate_before(place, bench, instance)
        if gate is not None:
            return gate
    maker = kind_of(instance, index)
    draft_text = await platform.getDraft(bench.job.id + "/" + bench.item.id + "/"
                                         + "|".join([instance.step["id"], str(instance.round), index]))
    draft = store.json(draft_text) if draft_text else {}
    return maker(place, bench, instance, index, rest == ["correct"], draft)


def kind_of(instance, index):
    """The class of screen for a step or cell."""
    step = instance.step
    if step["kind"] == "nameplate":
        return simple.PlateChoice if step["field"].get("choices") else simple.Plate
    if step["kind"] == "table" and bench_room.column_of(step, index).get("timing"):
        return timing.Timing
    if step["kind"] == "note" and step["id"] == shelf.STEP:
        return shelf.ShelfNote
    return KINDS[step["kind"]]


def gate_before(place, bench, instance):
    """The screen that must come before a step, or None."""
    step = instance.step
    if step["kind"] == "nameplate":
        return None
    if not gates.may_work(step["supply"]):
        return gates.NotAllowed(place, bench)
    cautions = bench.cautions_for(step["supply"], step)
    if cautions:
        return gates.Cautions(place, bench, step["supply"], cautions)
    if reads(step) and bench.conditions_due():
        gate = gates.Conditions(place, bench.job, True)
        gate.supply = bench.supply_now()
        gate.entries = len(bench.flow.open_entries)
        return gate
    return None


def reads(step):
    """True for a step that reads the item itself; what is copied from a list or a label needs no conditions."""
    if step["kind"] in ("timing", "sequence"):
        return True
    return bool(step.get("meter")) or [one for one in step.get("columns") or [] if one.get("meter")] != []
