"""The case file: JSON to Case and back. One upgrade step per version; figures keep the text they were typed as."""

from __future__ import annotations

import json
from collections.abc import Callable
from pathlib import Path
from typing import Any

from pydantic import ValidationError

from engine import units
from engine.case import EXCHANGERS, FLUID_TAGS, Case, Limits, Stream, stream_problems
from engine.stated import CaseError, Figure, Input, Problem, Stated, problems_of

FORMAT = "countercheck-case"
VERSION = 1
LARGEST = 1 << 20
DEEPEST = 20

UPGRADES: dict[int, Callable[[dict[str, Any]], dict[str, Any]]] = {}
"""Version to the step that makes the next version of it. A new version adds one line."""


def load_case(path: str | Path) -> Case:
    """The case in a file. Raises CaseError with every problem found, each a sentence with its place."""
    return parse_case(read_raw(path))


def read_raw(path: str | Path) -> dict[str, Any]:
    """The file's keys as typed, not yet checked against what a case allows. Raises CaseError."""
    path = Path(path)
    try:
        if path.is_dir():
            raise CaseError([Problem(path=str(path), says="is a folder; allowed is a case file (JSON)")])
        size = path.stat().st_size
        if size > LARGEST:
            says = f"holds {size / LARGEST:.1f} MiB; allowed is up to {LARGEST >> 20} MiB"
            raise CaseError([Problem(path=str(path), says=says)])
        data = path.read_bytes()
    except OSError as error:
        says = f"cannot be read: {(error.strerror or 'unknown reason').lower()}"
        raise CaseError([Problem(path=str(path), says=says)]) from None
    return raw_of(data)


def raw_of(data: bytes | str) -> dict[str, Any]:
    """JSON text as a group of keys. Raises CaseError: size, encoding, depth, duplicate keys, NaN, infinities."""
    if len(data) > LARGEST:
        raise CaseError([Problem(path="", says=f"the file is over the allowed {LARGEST >> 20} MiB")])
    try:
        text = data.decode("utf-8-sig") if isinstance(data, bytes) else data
    except UnicodeDecodeError:
        raise CaseError([Problem(path="", says="the file is not text; allowed is JSON in UTF-8")]) from None
    if not text.strip():
        raise CaseError([Problem(path="", says="the file is empty; allowed is a case in JSON")])
    if _depth(text) > DEEPEST:
        raise CaseError([Problem(path="", says=f"the file nests deeper than the allowed {DEEPEST} levels")])
    problems: list[Problem] = []

    def keys_once(pairs: list[tuple[str, Any]]) -> dict[str, Any]:
        group: dict[str, Any] = {}
        for key, value in pairs:
            if key in group:
                problems.append(Problem(path=key, says="stands twice in the same group; each key may stand once"))
            group[key] = value
        return group

    def no_constant(word: str) -> None:
        problems.append(Problem(path="", says=f"{word} is not a figure; write a finite number with its unit"))

    def whole(digits: str) -> Any:
        if len(digits) > 18:
            problems.append(Problem(path="", says=f"a number of {len(digits)} digits; allowed are up to 18"))
            return 0
        return int(digits)

    def pointed(digits: str) -> float:
        value = float(digits)
        if value in (float("inf"), float("-inf")) or len(digits) > 40:
            says = f"{digits[:20]} is too large or too long; write a finite number with its unit"
            problems.append(Problem(path="", says=says))
            return 0.0
        return value

    try:
        raw = json.loads(
            text, object_pairs_hook=keys_once, parse_constant=no_constant, parse_int=whole, parse_float=pointed
        )
    except json.JSONDecodeError as error:
        says = f"the file is not JSON: {error.msg.lower()} in line {error.lineno}, column {error.colno}"
        raise CaseError([Problem(path="", says=says)]) from None
    if problems:
        raise CaseError(problems)
    if not isinstance(raw, dict):
        raise CaseError([Problem(path="", says="the file is not a group of keys in braces")])
    return raw


def parse_case(raw: dict[str, Any]) -> Case:
    """The case that the keys state. Raises CaseError with every problem found at once."""
    raw = upgraded(raw)
    problems: list[Problem] = []
    try:
        case = Case.model_validate(raw, context={"file": True})
    except ValidationError as error:
        problems = problems_of(error, Case, frozenset((*FLUID_TAGS, *EXCHANGERS)))
        problems += _problems_of_sound_parts(raw, {problem.path for problem in problems})
        raise CaseError(_once(problems)) from None
    problems = list(case.problems())
    if problems:
        raise CaseError(_once(problems))
    return case


def upgraded(raw: dict[str, Any]) -> dict[str, Any]:
    """The keys as the present version names them. Raises CaseError where they are not a case of a known version."""
    form = raw.get("format")
    if form != FORMAT:
        says = f'"{form}" is not a case' if form is not None else "is missing"
        raise CaseError([Problem(path="format", says=f'{says}; allowed is "{FORMAT}"')])
    version = raw.get("version")
    if isinstance(version, bool) or not isinstance(version, int) or version < 1:
        given = "is missing" if version is None else f"{version!r} is not a version"
        raise CaseError([Problem(path="version", says=f"{given}; allowed is a whole number from 1 to {VERSION}")])
    if version > VERSION:
        says = f"{version} is newer than this program knows; allowed is up to {VERSION}"
        raise CaseError([Problem(path="version", says=says)])
    for step in range(version, VERSION):
        raw = UPGRADES[step](dict(raw))
    return raw


def _problems_of_sound_parts(raw: dict[str, Any], known: set[str]) -> list[Problem]:
    """When the file as a whole does not read, what its readable parts would still have been refused for."""
    found: list[Problem] = []
    streams: dict[str, Stream] = {}
    for side in ("inside", "outside"):
        given = raw.get(side)
        if not isinstance(given, dict):
            continue
        sound = {key: value for key, value in given.items() if not _any_at(f"{side}.{key}", known)}
        if "fluid" not in sound and not (isinstance(given.get("fluid"), dict) and "steam" in given["fluid"]):
            # What else is missing beside the fluid does not depend on which fluid it will be.
            sound["fluid"] = "Water"
        part = _lenient(Stream, sound)
        if isinstance(part, Stream):
            own = [problem.under(side) for problem in part.problems()]
            found += own
            if not own and not _any_at(side, known):
                streams[side] = part
    kind = raw.get("exchanger", {}).get("type") if isinstance(raw.get("exchanger"), dict) else None
    exchanger = _lenient(EXCHANGERS[kind], raw["exchanger"]) if kind in EXCHANGERS else None
    if exchanger is not None:
        found += [problem.under("exchanger") for problem in exchanger.problems()]
    if len(streams) == 2:
        found += stream_problems(streams["inside"], streams["outside"], 101325.0)
    return [problem for problem in found if problem.path not in known]


def _any_at(place: str, paths: set[str]) -> bool:
    return any(path == place or path.startswith((f"{place}.", f"{place}[")) for path in paths)


def _lenient(model: type[Input], raw: Any) -> Input | None:
    """The part without the keys that are not known, where the rest of it reads."""
    if not isinstance(raw, dict):
        return None
    try:
        return model.model_validate({k: v for k, v in raw.items() if k in model.model_fields}, context={"file": True})
    except ValidationError:
        return None


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
        return units.show(float(part), quantity, "si", digits=17)
    return part


def schema() -> dict[str, Any]:
    """JSON Schema of the case file, from the same declarations that check it."""
    return Case.model_json_schema()


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
