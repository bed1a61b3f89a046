"""The case file: JSON to Case and back. One upgrade step per version; figures keep the text they were typed as."""

from __future__ import annotations

import json
import math
from collections.abc import Callable, Iterator
from contextlib import suppress
from dataclasses import dataclass
from pathlib import Path
from typing import Any, TypeVar, cast

from pydantic import TypeAdapter, ValidationError
from pydantic.json_schema import GenerateJsonSchema, JsonSchemaValue
from pydantic_core import core_schema

from engine import units
from engine.case import ATMOSPHERE, EXCHANGERS, FLUIDS, Case, Limits, PureFluid, Stream, fluid_tag, stream_problems
from engine.stated import SIDES, CaseError, Figure, Input, Problem, Side, Stated, dotted, problems_of, short

FORMAT = "countercheck-case"
VERSION = 1
LARGEST = 1 << 20
DEEPEST = 20

_Part = TypeVar("_Part", bound=Input)

UPGRADES: dict[int, Callable[[dict[str, Any]], dict[str, Any]]] = {}
"""Version to the step that makes the next version of it. A new version adds one line."""


def load_case(path: str | Path) -> Case:
    """The case in a file. Raises CaseError with every problem found, each a sentence with its place."""
    raw, problems = _read(_bytes_of(path))
    try:
        case = parse_case(raw)
    except CaseError as error:
        wrong = {problem.path for problem in problems}
        raise CaseError(_once([*problems, *(p for p in error.problems if not _any_at(p.path, wrong))])) from None
    if problems:
        raise CaseError(problems)
    return case


def read_raw(path: str | Path) -> dict[str, Any]:
    """The file's keys as typed, not yet checked against what a case allows. Raises CaseError."""
    return raw_of(_bytes_of(path))


def _bytes_of(path: str | Path) -> bytes:
    path = Path(path)

    def refused(says: str) -> CaseError:
        return CaseError([Problem(path=str(path), says=says)])

    if "\0" in str(path):
        raise refused("is not the name of a file")
    try:
        with path.open("rb") as file:
            data = file.read(LARGEST + 1)
    except IsADirectoryError:
        raise refused("is a folder; allowed is a case file (JSON)") from None
    except OSError as error:
        raise refused(f"cannot be read: {(error.strerror or 'unknown reason').lower()}") from None
    if len(data) > LARGEST:
        raise refused(f"is too large; allowed is up to {LARGEST >> 20} MiB")
    return data


def raw_of(data: bytes | str) -> dict[str, Any]:
    """JSON text as a group of keys. Raises CaseError: size, encoding, depth, duplicate keys, NaN, infinities."""
    raw, problems = _read(data)
    if problems:
        raise CaseError(problems)
    return raw


def _read(data: bytes | str) -> tuple[dict[str, Any], list[Problem]]:
    """The keys of a JSON text, and what single places of it are refused for; those hold None. Raises CaseError."""

    def refused(says: str) -> CaseError:
        return CaseError([Problem(path="", says=f"the file {says}")])

    if len(data) > LARGEST:
        raise refused(f"is too large; allowed is up to {LARGEST >> 20} MiB")
    try:
        text = data.decode() if isinstance(data, bytes) else data
    except UnicodeDecodeError:
        raise refused("is not text; allowed is JSON in UTF-8") from None
    text = text.removeprefix("\ufeff")
    if not text.strip():
        raise refused("is empty; allowed is a case in JSON")
    if _depth(text) > DEEPEST:
        raise refused(f"nests deeper than the allowed {DEEPEST} levels")
    try:
        raw = json.loads(
            text, object_pairs_hook=_keys_once, parse_constant=_not_finite, parse_int=_whole, parse_float=_pointed
        )
    except json.JSONDecodeError as error:
        what = error.msg.lower().removesuffix(" at").removesuffix(" starting")
        raise refused(f"is not JSON: {what} in line {error.lineno}, column {error.colno}") from None
    problems: list[Problem] = []
    raw = _without_wrong(raw, (), problems)
    if not isinstance(raw, dict):
        raise refused("is not a group of keys in braces")
    return raw, problems


@dataclass(frozen=True)
class _Wrong:
    """Stands where JSON holds what no case file may hold."""

    says: str


def _keys_once(pairs: list[tuple[str, Any]]) -> dict[str, Any]:
    group: dict[str, Any] = {}
    for key, value in pairs:
        group[key] = _Wrong("stands twice in the same group; allowed is once") if key in group else value
    return group


def _not_finite(word: str) -> _Wrong:
    return _Wrong(f"{word} is not a figure; allowed is a finite number with its unit, as text")


def _whole(digits: str) -> Any:
    if len(digits) > 18:
        return _Wrong(f"is a number of {len(digits)} digits; allowed is up to 18")
    return int(digits)


def _pointed(digits: str) -> Any:
    value = float(digits)
    if len(digits) > 40 or math.isinf(value):
        return _Wrong(f"{digits[:20]} is too large or too long; allowed is a finite number with its unit, as text")
    return value


def _without_wrong(part: Any, place: tuple[str | int, ...], problems: list[Problem]) -> Any:
    """The part with None where something is wrong, which is added to the problems."""
    if isinstance(part, _Wrong):
        problems.append(Problem(path=dotted(place), says=part.says))
        return None
    if isinstance(part, dict):
        return {key: _without_wrong(value, (*place, key), problems) for key, value in part.items()}
    if isinstance(part, list):
        return [_without_wrong(value, (*place, i), problems) for i, value in enumerate(part)]
    return part


def parse_case(raw: dict[str, Any]) -> Case:
    """The case that the keys state. Raises CaseError with every problem found at once."""
    raw = upgraded(raw)
    try:
        case = Case.model_validate(raw, context={"file": True})
    except ValidationError as error:
        problems = problems_of(error, Case, {"fluid": FLUIDS.keys(), "exchanger": EXCHANGERS.keys()})
        problems += _problems_of_sound_parts(raw, {problem.path for problem in problems})
        raise CaseError(_once(problems)) from None
    problems = list(case.problems())
    if problems:
        raise CaseError(_once(problems))
    return case


def upgraded(raw: dict[str, Any]) -> dict[str, Any]:
    """The keys as the present version names them. Raises CaseError where they are not a case of a known version."""
    if not isinstance(raw, dict):
        raise CaseError([Problem(path="", says="a case is a group of keys in braces")])
    problems = list(_unfit_keys(raw))
    form, version = raw.get("format"), raw.get("version")
    if form != FORMAT:
        given = "is missing" if form is None else f"{short(form)} is not a case"
        problems.append(Problem(path="format", says=f'{given}; allowed is "{FORMAT}"'))
    if isinstance(version, bool) or not isinstance(version, int) or version < 1:
        given = "is missing" if version is None else f"{short(version)} is not a version"
        allowed = "1" if VERSION == 1 else f"a whole number from 1 to {VERSION}"
        problems.append(Problem(path="version", says=f"{given}; allowed is {allowed}"))
    elif version > VERSION:
        says = f"{short(version)} is newer than this program knows; allowed is up to {VERSION}"
        problems.append(Problem(path="version", says=says))
    if problems:
        raise CaseError(problems)
    for step in range(int(version or VERSION), VERSION):
        raw = UPGRADES[step](dict(raw))
    return raw


def _unfit_keys(part: Any, place: tuple[str | int, ...] = ()) -> Iterator[Problem]:
    if len(place) > DEEPEST:
        yield Problem(path=dotted(place[:1]), says=f"nests deeper than the allowed {DEEPEST} levels")
        return
    items = part.items() if isinstance(part, dict) else enumerate(part) if isinstance(part, list) else ()
    for key, value in items:
        if isinstance(key, str) and any("\ud800" <= c <= "\udfff" for c in key):
            shown = key.encode("utf-8", "replace").decode()
            yield Problem(path=dotted((*place, shown)), says="holds half of a surrogate pair; allowed is plain text")
        yield from _unfit_keys(value, (*place, key))


def _problems_of_sound_parts(raw: dict[str, Any], known: set[str]) -> list[Problem]:
    """When the file as a whole does not read, what its readable parts would still have been refused for."""
    found: list[Problem] = []
    streams: dict[Side, Stream] = {}
    for side in SIDES:
        given = raw.get(side)
        if not isinstance(given, dict):
            continue
        stream = streams[side] = _readable(Stream, given)
        for name in ("flow", "T_in", "p_in", "T_out"):
            stream.__dict__.setdefault(name, None)
        fluid = stream.__dict__.pop("fluid", None)
        tag = fluid_tag(given.get("fluid"))
        if fluid is None and tag is not None:
            found += _found(_readable(FLUIDS[tag], given["fluid"]), f"{side}.fluid")
        if fluid is not None or tag != "steam":
            # What else is missing does not depend on which fluid it will be, other than steam.
            stream.__dict__["fluid"] = fluid or PureFluid(name="Water")
            found += _found(stream, side)
        stream.__dict__["fluid"] = None if _any_at(f"{side}.fluid", {problem.path for problem in found}) else fluid
    given = raw.get("exchanger")
    kind = given.get("type") if isinstance(given, dict) else None
    if isinstance(given, dict) and isinstance(kind, str) and kind in EXCHANGERS:
        found += _found(_readable(EXCHANGERS[kind], given), "exchanger")
    stated = Case.declared()["atmosphere"]
    given = raw.get("atmosphere", ATMOSPHERE) if "atmosphere" not in known else ATMOSPHERE
    found += stream_problems(streams, float(stated.read(given)))
    return [problem for problem in found if not _any_at(problem.path, known)]


def _readable(model: type[_Part], raw: dict[str, Any]) -> _Part:
    """The part with the fields that read; those that do not are absent from it."""
    read: dict[str, Any] = {}
    for name in model.model_fields.keys() & raw.keys():
        with suppress(ValidationError):
            adapter = TypeAdapter(model.model_fields[name].rebuild_annotation())
            read[name] = adapter.validate_python(raw[name], context={"file": True})
    part = cast(_Part, model.model_construct(**read))
    for name in raw.keys() - read.keys():
        part.__dict__.pop(name, None)
    return part


def _found(part: Input, place: str) -> list[Problem]:
    """The problems of a part, without those that depend on what could not be read."""
    found: list[Problem] = []
    for check in part.checks():
        with suppress(AttributeError):
            for problem in check:
                found.append(problem.under(place))
    return found


def _any_at(place: str, paths: set[str]) -> bool:
    return any(path == place or path.startswith((f"{place}.", f"{place}[")) for path in paths)


def _once(problems: list[Problem]) -> list[Problem]:
    return list(dict.fromkeys(problems))


def _depth(text: str) -> int:
    depth = deepest = 0
    quoted = escaped = False
    for c in text:
        if quoted:
            escaped, quoted = (c == "\\" and not escaped), not (c == '"' and not escaped)
        elif c == '"':
            quoted = True
        elif c in "[{":
            depth += 1
            deepest = max(deepest, depth)
        elif c in "]}":
            depth -= 1
    return deepest


def raw_case(case: Case) -> dict[str, Any]:
    """The keys of a case as a file holds them: what was stated only, figures as they were typed."""
    raw = _raw(case)
    assert isinstance(raw, dict)
    return {"format": FORMAT, "version": VERSION, **raw}


def save_case(case: Case, path: str | Path) -> None:
    """Write the case file."""
    Path(path).write_text(dump_case(case), encoding="utf-8")


def dump_case(case: Case) -> str:
    return json.dumps(raw_case(case), indent=1, ensure_ascii=False) + "\n"


def _raw(part: Any, declared: Any = None) -> Any:
    if isinstance(part, Input):
        kinds = type(part).declared()
        keys = {n: _raw(getattr(part, n), kinds.get(n)) for n in type(part).model_fields if n in part.model_fields_set}
        return keys["name"] if set(type(part).model_fields) == {"name"} else keys
    if isinstance(part, (tuple, list)):
        return [_raw(item) for item in part]
    if isinstance(part, Figure) and part.text:
        return part.text
    if isinstance(part, float) and isinstance(declared, Stated):
        quantity = part.quantity if isinstance(part, Figure) and part.quantity else declared.quantities[0]
        return float(part) if quantity == "dimensionless" else _typed(float(part), quantity)
    return part


def _typed(value: float, quantity: str) -> str:
    """The shortest text that reads back as the same value."""
    shown = (units.show(value, quantity, "si", digits) for digits in range(3, 17))
    exact = units.show(value, quantity, "si", 17)
    return next((text for text in shown if units.parse(text, quantity).value == value), exact)


class _WithoutDefaults(GenerateJsonSchema):
    """A default is an SI value, which would not be valid text; what is assumed stands in the description."""

    def default_schema(self, schema: core_schema.WithDefaultSchema) -> JsonSchemaValue:
        return self.generate_inner(schema["schema"])


def schema() -> dict[str, Any]:
    """JSON Schema of the case file, from the same declarations that check it."""
    found = Case.model_json_schema(schema_generator=_WithoutDefaults)
    found["properties"]["version"]["const"] = VERSION
    found["required"] = ["format", "version", *found["required"]]
    return {"$schema": GenerateJsonSchema.schema_dialect, **found}


__all__ = [
    "Limits",
    "dump_case",
    "load_case",
    "parse_case",
    "raw_case",
    "raw_of",
    "read_raw",
    "save_case",
    "schema",
    "upgraded",
]
