"""The shape of rule files: what keys there are and of which type. Meaning is checked elsewhere (checks_*.py)."""

import datetime
from typing import Annotated, Any, Literal

from pydantic import BaseModel, ConfigDict, Field, StrictBool, StrictInt, StrictStr

SupplyState = Literal["isolated", "low voltage live", "mains live"]
Phase = Literal["prepare", "as found", "service", "as left", "close"]
Depth = Literal["routine", "full", "both"]
StepKind = Literal["confirm", "measure", "table", "sequence", "timing", "choice", "action", "photograph", "note"]
Tag = Literal["READ", "READ-2", "MEM", "MEM+", "MEM?", "PRACTICE", "DERIVED", "CALC", "FACT", "WORKSHOP"]
Rule = Literal["simple", "guarded", "probability"]
Day = Annotated[datetime.date, Field(strict=True)]
Text = StrictStr
Whole = StrictInt
Flag = StrictBool
Format = Literal[1]


class Form(BaseModel):
    """What all shapes share: unknown keys are errors, nothing is converted."""

    model_config = ConfigDict(extra="forbid", frozen=True, populate_by_name=True)


class Minutes(Form):
    """Minutes at work and minutes waiting."""

    work: Whole
    wait: Whole


class MinutesByDepth(Form):
    """Minutes of each depth."""

    routine: Minutes
    full: Minutes


class Choice(Form):
    """One of several answers."""

    id: Text
    label: Text


class Unknown(Form):
    """What an answer "not marked, unknown" then means."""

    then: Literal["default", "worst", "not judged"]
    value: Text = ""
    tag: Tag = "PRACTICE"
    note: Text = ""


class Plate(Form):
    """One nameplate question."""

    id: Text
    label: Text
    text: Text = ""
    quantity: Text = ""
    unit: Text = ""
    choices: list[Choice] = []
    unknown: Unknown


class When(Form):
    """Applies only where a field has one of these values; unknown counts as a match."""

    field: Text
    is_: list[Text] = Field(alias="is")


class Entry(Form):
    """Something that a step leaves open until another restores it."""

    id: Text
    text: Text


class Abort(Form):
    """Stop beyond this."""

    text: Text
    quantity: Text
    at_most: Text


class Column(Form):
    """One column of a table."""

    id: Text
    title: Text
    quantity: Text
    unit: Text = ""
    meter: Text = ""
    timing: Flag = False
    two_wire: Flag = False


class Rows(Form):
    """The rows of a table: as many as a nameplate count says, or named."""

    from_: Text = Field(default="", alias="from")
    labels: list[Text] = []


class Layout(Form):
    """The positions of a drum, or a layout for each choice of a nameplate field."""

    positions: list[Text] = []
    from_: Text = Field(default="", alias="from")
    layouts: dict[str, list[Text]] = {}


class Step(Form):
    """One step."""

    id: Text
    kind: StepKind
    phase: Phase
    supply: SupplyState
    title: Text
    text: Text
    why: Text = ""
    drawing: Text = ""
    depth: Depth = "both"
    hold: Flag = False
    safety: Flag = False
    optional: Flag = False
    when: When | None = None
    cautions: list[Text] = []
    quantity: Text = ""
    unit: Text = ""
    meter: Text = ""
    two_wire: Flag = False
    repeats: Whole | list[Text] = 1
    can_burn: Flag = False
    abort: list[Abort] = []
    opens: Entry | None = None
    restores: Text = ""
    choices: list[Choice] = []
    rows: Rows | None = None
    columns: list[Column] = []
    layout: Layout | None = None
    pulses: Whole = 0
    corrective: Flag = False
    tries: Whole = 0


class Value(Form):
    """A value computed from readings."""

    id: Text
    label: Text
    formula: Text
    quantity: Text
    unit: Text = ""
    each: Text = ""


class Cite(Form):
    """A structured citation."""

    source: Text
    clause: Text = ""
    edition: Text = ""


class LimitEntry(Form):
    """What a limit says from a day on."""

    since: Day
    at_least: Text = ""
    at_most: Text = ""
    cite: Cite
    tag: Tag
    note: Text = ""


class Limit(Form):
    """An acceptance limit with its dated entries."""

    id: Text
    label: Text
    value: Text
    unit: Text = ""
    each: Flag = False
    rule: Rule
    guard: Text = "1"
    probability: Text = "0.95"
    coverage: Text = "95 %"
    safety: Flag = False
    bounds: Literal["nothing", "restrictions", "unserviceable", ""] = ""
    depth: Depth = "both"
    when: When | None = None
    corrective: list[Text] = []
    missing: Text = ""
    entry: list[LimitEntry]


class Procedure(Form):
    """A whole procedure file."""

    format: Format
    id: Text
    title: Text
    kind: Text
    trade: list[Text] = []
    purpose: Text
    cautions: list[Text]
    minutes: MinutesByDepth
    supply: dict[SupplyState, Text]
    nameplate: list[Plate] = []
    step: list[Step]
    value: list[Value] = []
    limit: list[Limit]


class Defect(Form):
    """A defect noted in a case."""

    what: Text
    level: Literal["stop use", "repair before next use", "watch"]


class Expect(Form):
    """What the engine must say."""

    outcome: Literal["serviceable", "serviceable with restrictions", "unserviceable"]
    called_for: list[Text] | None = None
    open_entries: list[Text] | None = None
    complete: Flag | None = None
    reasons: list[Text] = []
    found: dict[str, Text] = {}
    left: dict[str, Text] = {}
    final: dict[str, Text] = {}
    value: dict[str, Text] = {}
    reason: dict[str, Text] = {}


class Case(Form):
    """One worked case."""

    name: Text
    depth: Literal["routine", "full"] = "routine"
    on: Day = datetime.date(2026, 6, 1)
    meters: list[Text] | None = None
    not_done: list[Text] = []
    nameplate: dict[str, Text] = {}
    conditions: dict[str, Text] = {}
    found: dict[str, Any] = {}
    round: list[dict[str, Any]] = []
    last: dict[str, Any] = {}
    skip: dict[str, Text] = {}
    defect: list[Defect] = []
    expect: Expect


class CasesFile(Form):
    """The cases beside a procedure."""

    case: list[Case]
    meter: list[dict[str, Any]] = []


class Caution(Form):
    """A safety text with its signal word (ISO 3864-2)."""

    id: Text
    signal: Literal["danger", "warning", "caution", "notice"]
    title: Text
    text: Text
    supply: list[SupplyState] = []


class CautionsFile(Form):
    """rules/cautions.toml"""

    caution: list[Caution]


class PublicSource(Form):
    """Something that a limit may cite."""

    id: Text
    title: Text
    note: Text = ""


class SourcesFile(Form):
    """rules/sources.toml"""

    source: list[PublicSource]


class Kind(Form):
    """A kind of equipment."""

    id: Text
    title: Text
    trade: list[Text] = []
    about: Text


class MeterFunction(Form):
    """What a meter can be set to, as steps name it."""

    name: Text
    quantity: Text


class FunctionsFile(Form):
    """rules/meters/functions.toml"""

    function: list[MeterFunction]


class BenchFile(Form):
    """rules/meters/bench.toml: meters for the cases, in the form of engine/meters.py."""

    meter: list[dict[str, Any]]


class Labelled(Form):
    """A material or the base of a lubricant."""

    id: Text
    label: Text
    note: Text = ""


class Pair(Form):
    """How a lubricant's base goes with a material."""

    base: Text
    material: Text
    goes: Literal["ok", "care", "unknown", "never"]
    tag: Tag
    cite: Cite
    note: Text = ""


class Agent(Form):
    """A cleaning agent, on what never, and what to test first."""

    id: Text
    label: Text
    never: list[Text] = []
    test_first: list[Text] = []
    note: Text = ""
    tag: Tag


class MaterialsFile(Form):
    """rules/materials.toml"""

    material: list[Labelled]
    base: list[Labelled]
    pair: list[Pair]
    agent: list[Agent] = []


class OverlayLimit(Form):
    """A limit that a workshop sets for itself."""

    procedure: Text
    id: Text
    entry: list[LimitEntry]


class OverlayFile(Form):
    """A file of a workshop's own limits."""

    limit: list[OverlayLimit]


class Published(Form):
    """A limit's dated entry as it was published."""

    procedure: Text
    limit: Text
    since: Day
    says: Text
    digest: Text


class PublishedFile(Form):
    """rules/published.toml"""

    entry: list[Published] = []
