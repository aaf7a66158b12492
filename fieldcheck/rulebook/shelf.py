"""What the procedures share: cautions, sources, kinds, materials, meter functions and the meters of the cases."""

from collections.abc import Iterable
from dataclasses import dataclass, field
from pathlib import Path as FilePath
from typing import Any

from fieldcheck.engine import meters
from fieldcheck.engine.errors import FieldcheckError
from fieldcheck.rulebook import shapes
from fieldcheck.rulebook.findings import Findings, Source, did_you_mean
from fieldcheck.rulebook.reading import shaped


@dataclass
class Shelf:
    """Everything by its id; functions: meter function -> quantity; bench: meters of the cases as plain data;
    broken: what could not be read whole, so that nothing is said to be missing from it."""

    cautions: dict[str, shapes.Caution] = field(default_factory=dict)
    sources: dict[str, shapes.PublicSource] = field(default_factory=dict)
    kinds: dict[str, shapes.Kind] = field(default_factory=dict)
    functions: dict[str, str] = field(default_factory=dict)
    bench: list[dict[str, Any]] = field(default_factory=list)
    materials: shapes.MaterialsFile | None = None
    read: list[Source] = field(default_factory=list)
    broken: set[str] = field(default_factory=set)


def load_shelf(folder: FilePath, findings: Findings) -> Shelf:
    """Reads the shared files of a rules folder; what is wrong becomes findings."""
    shelf = Shelf()
    _listed(folder / "cautions.toml", shapes.CautionsFile, "caution", shelf.cautions, shelf, findings)
    _listed(folder / "sources.toml", shapes.SourcesFile, "source", shelf.sources, shelf, findings)
    for file in sorted((folder / "kinds").glob("*.toml")):
        source, kind = shaped(shapes.Kind, file, findings)
        _kept(shelf, source)
        if kind is None or source is None:
            shelf.broken.add("kind")
            continue
        wanted = file.stem.replace("_", "-")
        if kind.id != wanted:
            findings.add(source, ("id",), f'id "{kind.id}" does not go with the file\'s name', f'write id = "{wanted}"')
        shelf.kinds[kind.id] = kind
    _functions(folder / "meters" / "functions.toml", shelf, findings)
    _bench(folder / "meters" / "bench.toml", shelf, findings)
    if (folder / "materials.toml").exists():
        _materials(folder / "materials.toml", shelf, findings)
    return shelf


def _kept(shelf: Shelf, source: Source | None) -> None:
    if source is not None:
        shelf.read.append(source)


def _listed(file: FilePath, shape: Any, key: str, into: dict[str, Any], shelf: Shelf, findings: Findings) -> None:
    source, found = shaped(shape, file, findings)
    _kept(shelf, source)
    if source is None or found is None:
        shelf.broken.add(key)
        return
    for place, one in enumerate(getattr(found, key)):
        if one.id in into:
            findings.add(source, (key, place, "id"), f'a second {key} "{one.id}"', "give each its own id")
        into[one.id] = one


def _functions(file: FilePath, shelf: Shelf, findings: Findings) -> None:
    from fieldcheck.rulebook.formula import Wrong, check_quantity

    source, found = shaped(shapes.FunctionsFile, file, findings)
    _kept(shelf, source)
    if source is None or found is None:
        shelf.broken.add("function")
        return
    for place, one in enumerate(found.function):
        try:
            check_quantity(one.quantity)
        except Wrong as wrong:
            findings.add(source, ("function", place, "quantity"), wrong.what, wrong.mend)
            shelf.broken.add("function")
        shelf.functions[one.name] = one.quantity


def _bench(file: FilePath, shelf: Shelf, findings: Findings) -> None:
    source, found = shaped(shapes.BenchFile, file, findings)
    _kept(shelf, source)
    if source is not None and found is not None:
        shelf.bench = good_meters(source, found.meter, shelf.functions, findings)


def good_meters(source: Source, given: list[dict[str, Any]], functions: dict[str, str],
                findings: Findings) -> list[dict[str, Any]]:
    """The meters of a file that the engine understands; the rest become findings."""
    good = []
    for place, one in enumerate(given):
        data = {key: value.isoformat() if hasattr(value, "isoformat") else value for key, value in one.items()}
        try:
            made = meters.meter(data)
        except (FieldcheckError, KeyError, TypeError, AttributeError) as error:
            what = str(error.what) if isinstance(error, FieldcheckError) else f"this is no meter: {error!r}"
            findings.add(source, ("meter", place), what, "see the form at the head of engine/meters.py")
            continue
        for function in made.functions:
            if functions and function.function not in functions:
                findings.add(source, ("meter", place), f'there is no meter function "{function.function}"',
                             did_you_mean(function.function, functions))
        good.append(data)
    return good


def _materials(file: FilePath, shelf: Shelf, findings: Findings) -> None:
    source, found = shaped(shapes.MaterialsFile, file, findings)
    _kept(shelf, source)
    if source is None or found is None:
        return
    shelf.materials = found
    known = {"material": [one.id for one in found.material], "base": [one.id for one in found.base]}
    pairs: set[tuple[str, str]] = set()
    for place, pair in enumerate(found.pair):
        for key in ("base", "material"):
            name = getattr(pair, key)
            _there(source, ("pair", place, key), key, name, known[key], findings)
        if (pair.base, pair.material) in pairs:
            findings.add(source, ("pair", place), f'a second entry for {pair.base} on {pair.material}', "keep one")
        pairs.add((pair.base, pair.material))
        if pair.cite.source not in shelf.sources:
            findings.add(source, ("pair", place, "cite"), f'there is no source "{pair.cite.source}"',
                         did_you_mean(pair.cite.source, shelf.sources))
    for place, agent in enumerate(found.agent):
        for key in ("never", "test_first"):
            for name in getattr(agent, key):
                _there(source, ("agent", place, key), "material", name, known["material"], findings)


def _there(source: Source, path: Any, what: str, name: str, known: Iterable[str], findings: Findings) -> None:
    if name not in known:
        findings.add(source, path, f'there is no {what} "{name}"', did_you_mean(name, known))


