"""What a model declares, as parts of a form, and how a raw case is read and changed at a path."""

from __future__ import annotations

import copy
import re
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from functools import cache
from itertools import pairwise
from typing import Any, Literal, get_args

import engine

Path = tuple[str | int, ...]
TITLES = {"dp_factor": "Factors on the pressure drops", "film_factor": "Factors on the films"}
"""Of groups whose name does not speak for itself."""
Shape = Literal["box", "group", "rows", "kinds"]


@dataclass(frozen=True)
class Part:
    """One field: a box to fill, a group of further fields, rows of them, or kinds of group to choose from."""

    owner: type[engine.Input]
    name: str
    shape: Shape
    declared: Any
    models: tuple[type[engine.Input], ...]
    needed: bool
    default: Any

    @property
    def title(self) -> str:
        return TITLES.get(self.name) or self.name.replace("_", " ").capitalize()

    @property
    def fewest(self) -> int:
        """Of the rows."""
        return self.declared or 0


@cache
def parts(model: type[engine.Input]) -> tuple[Part, ...]:
    return tuple(part for name in model.model_fields if (part := _part(model, name)) is not None)


def _part(model: type[engine.Input], name: str) -> Part | None:
    field, declared = model.model_fields[name], model.declared().get(name)
    needed = field.is_required()
    default = None if needed else field.default
    if declared is not None:
        return Part(model, name, "box", declared, (), needed, default)
    models = tuple(engine.EXCHANGERS.values()) if name == "exchanger" else tuple(_models(field.annotation))
    if not models:
        return None
    if any(kind_of(m) for m in models):
        return Part(model, name, "kinds", None, models, needed, default)
    if _is_list(field.annotation):
        fewest = next((m.min_length for m in field.metadata if hasattr(m, "min_length")), 0)
        return Part(model, name, "rows", fewest, models, needed, default)
    return Part(model, name, "group", None, models, needed, default)


def _models(annotation: Any) -> Iterator[type[engine.Input]]:
    if isinstance(annotation, type) and issubclass(annotation, engine.Input):
        yield annotation
    for part in get_args(annotation):
        yield from _models(part)


def _is_list(annotation: Any) -> bool:
    return getattr(annotation, "__origin__", None) in (tuple, list) or any(map(_is_list, get_args(annotation)))


def kind_of(model: type[engine.Input]) -> str:
    """What a model is called among its kinds; empty where it is not one of several."""
    if "type" in model.model_fields:
        return str(model.model_fields["type"].default)
    return str(getattr(model, "tag_name", ""))


def kind_stated(models: Sequence[type[engine.Input]], raw: Any) -> type[engine.Input]:
    """The kind that the keys speak of; the first where they say nothing."""
    keys = raw if isinstance(raw, dict) else {}
    for model in models:
        kind = kind_of(model)
        if keys.get("type") == kind or (
            "type" not in model.model_fields and kind in model.model_fields and kind in keys
        ):
            return model
    return models[0]


def is_named(model: type[engine.Input]) -> bool:
    """Whether a file may state it by its bare name."""
    return set(model.model_fields) == {"name"}


def fresh(model: type[engine.Input]) -> Any:
    """The keys that state a kind and nothing else."""
    kind = kind_of(model)
    if "type" in model.model_fields:
        return {"type": kind}
    part = next((part for part in parts(model) if part.name == kind), None)
    if part is None:
        return None
    empty = {"box": "", "rows": [{} for _ in range(max(part.fewest, 1))] if part.shape == "rows" else None}
    return {kind: empty.get(part.shape, {})}


def filled(model: type[engine.Input], raw: Any) -> Any:
    """The keys with an empty group wherever a needed group is absent, so that all that is missing is named at once."""
    if not isinstance(raw, dict):
        return raw
    keys = dict(raw)
    for part in parts(model):
        if part.name not in keys and part.needed and part.shape in ("group", "kinds"):
            start = {} if part.shape == "group" else fresh(part.models[0])
            if start is not None:
                keys[part.name] = start
        if part.name in keys and part.shape in ("group", "kinds"):
            if part.name == "exchanger" and isinstance(keys[part.name], dict) and "type" not in keys[part.name]:
                keys[part.name] = {"type": kind_of(part.models[0]), **keys[part.name]}
            keys[part.name] = filled(kind_stated(part.models, keys[part.name]), keys[part.name])
    return keys


def figures(model: type[engine.Input], raw: Any) -> Iterator[tuple[str, tuple[str, ...]]]:
    """Every typed figure with the quantities that it may be of."""
    if not isinstance(raw, dict):
        return
    for part in parts(model):
        value = raw.get(part.name)
        if part.shape == "box" and isinstance(part.declared, engine.Stated) and isinstance(value, str) and value:
            yield value, part.declared.quantities
        elif part.shape in ("group", "kinds"):
            yield from figures(kind_stated(part.models, value), value)
        elif part.shape == "rows" and isinstance(value, list):
            for row in value:
                yield from figures(part.models[0], row)


def words(model: type[engine.Input], raw: Any, path: Path) -> str:
    """A place as the form calls it: "Annulus, inlet temperature"."""
    said: list[str] = []
    for i, step in enumerate(path):
        if isinstance(step, int):
            said.append(f"row {step + 1}")
            continue
        part = next((part for part in parts(model) if part.name == step), None)
        if part is None:
            return ", ".join([*said, *(f"“{rest}”" for rest in path[i:])])
        if part.shape == "box":
            said.append(part.declared.name)
            continue
        if part.name in engine.SIDES:
            exchanger = next(p for p in parts(engine.Case) if p.name == "exchanger")
            said.append(kind_stated(exchanger.models, get(raw, ("exchanger",))).side_names[part.name])
        elif part.shape != "rows":
            said.append(part.title)
        model = kind_stated(part.models, get(raw, path[: i + 1]))
    return ", ".join([said[0], *(text[:1].lower() + text[1:] for text in said[1:])]) if said else ""


def in_form_words(says: str, model: type[engine.Input]) -> str:
    """A sentence of the engine with the keys that it quotes called as the form calls them."""
    for part in parts(model):
        if part.shape == "box":
            says = says.replace(f'"{part.name}"', f"“{part.declared.name}”")
    return says


def model_at(model: type[engine.Input], raw: Any, path: Path) -> type[engine.Input]:
    """The model that declares what stands at a path: a group's own, or that of the group a box is in."""
    for i, step in enumerate(path):
        part = next((part for part in parts(model) if part.name == step), None)
        if part is not None and part.models:
            model = kind_stated(part.models, get(raw, path[: i + 1]))
    return model


def entry(declared: Any, text: str) -> Any:
    """What a file holds for a typed text: a count is a whole number, everything else stays as typed."""
    whole = isinstance(declared, engine.Count) and re.fullmatch(r"[+-]?\d{1,18}", text)
    return int(text) if whole else text


def steps(place: str) -> Path:
    """A dotted place as a path."""
    return tuple(int(step) if step.isdigit() else step for step in re.findall(r"[^.\[\]]+", place))


# --- a raw case at a path ---------------------------------------------------------------------------------------------


def get(raw: Any, path: Path) -> Any:
    """What stands at a path; None where nothing does."""
    for step in path:
        in_list = isinstance(raw, list) and isinstance(step, int) and step < len(raw)
        if not in_list and not (isinstance(raw, dict) and step in raw):
            return None
        raw = raw[step]
    return raw


def put(raw: dict[str, Any], path: Path, value: Any) -> dict[str, Any]:
    """A copy with a value at a path; None takes the key away."""
    raw = copy.deepcopy(raw)
    at: Any = raw
    for step, following in pairwise(path):
        inner = get(at, (step,))
        if not isinstance(inner, list if isinstance(following, int) else dict):
            inner = [] if isinstance(following, int) else {}
            _set(at, step, inner)
        at = inner
    if value is not None:
        _set(at, path[-1], value)
    elif isinstance(at, list):
        del at[path[-1]]
    else:
        at.pop(path[-1], None)
    return raw


def _set(at: Any, step: str | int, value: Any) -> None:
    if isinstance(at, list) and isinstance(step, int):
        at.extend({} for _ in range(step + 1 - len(at)))
    at[step] = value
