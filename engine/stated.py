"""How an input is declared, once: quantity, trade name, bounds, help. The form, the case file, its validation, its
JSON Schema and the report's input table all read that declaration.
"""

from __future__ import annotations

import difflib
import json
import types
import unicodedata
from collections.abc import Callable, Collection, Iterable, Iterator, Mapping
from dataclasses import dataclass
from itertools import pairwise
from typing import Any, Literal, Union, get_args, get_origin

from pydantic import BaseModel, ConfigDict, GetCoreSchemaHandler, GetJsonSchemaHandler, ValidationError
from pydantic_core import CoreSchema, PydanticCustomError, core_schema

from engine import units

Side = Literal["inside", "outside"]
SIDES: tuple[Side, Side] = ("inside", "outside")


def opposite(side: Side) -> Side:
    return "outside" if side == "inside" else "inside"


Origin = Literal["measured", "sheet", "assumed", "calculated"]


@dataclass(frozen=True, kw_only=True)
class Estimate:
    """A figure with its doubt: SI value, one standard deviation, and where it comes from."""

    value: float
    sd: float
    origin: Origin


class Figure(float):
    """A stated figure: its SI value, with the text it was typed as.

    `sd` is one standard deviation in SI when the user gave one; `digit` is the size of one unit in the last typed
    digit, in SI; `quantity` is the one of the allowed quantities that the typed unit belongs to.
    """

    text: str
    sd: float | None
    quantity: str
    digit: float | None

    def __new__(
        cls, value: float, text: str = "", sd: float | None = None, quantity: str = "", digit: float | None = None
    ) -> Figure:
        self = super().__new__(cls, value)
        self.text, self.sd, self.quantity, self.digit = text, sd, quantity, digit
        return self

    def __getnewargs__(self) -> tuple[float, str, float | None, str, float | None]:  # type: ignore[override]
        return (float(self), self.text, self.sd, self.quantity, self.digit)


@dataclass(frozen=True)
class Stated:
    """Declares one figure of the input. `low` and `high` are SI; they belong to the allowed span unless `open`."""

    quantity: str | tuple[str, ...]
    name: str
    help: str = ""
    low: float = -1e12
    high: float = 1e12
    above: float | None = None
    """A bound that does not itself belong to the span, such as zero for a length."""
    assumed: str = ""
    """Where the default comes from, when the field has one: shown as an assumption."""
    example: str = ""

    @property
    def quantities(self) -> tuple[str, ...]:
        return (self.quantity,) if isinstance(self.quantity, str) else self.quantity

    def allowed(self) -> str:
        """The allowed span in words, in SI display units."""

        def show(x: float) -> str:
            return units.show(x, self.quantities[0], "si")

        low = f"above {show(self.above)}" if self.above is not None else f"from {show(self.low)}"
        return f"{low} to {show(self.high)}" if self.high < 1e12 else low

    def read(self, given: Any, file: bool = False) -> Figure:
        """The figure that was given; PydanticCustomError with a sentence when it cannot be read or is out of span."""
        if isinstance(given, str):
            try:
                typed = units.parse(given, *self.quantities)
            except units.UnitError as error:
                raise _refused(str(error)) from None
            figure = Figure(typed.value, typed.text, typed.sd, typed.quantity, typed.digit)
        elif isinstance(given, (int, float)) and not isinstance(given, bool):
            if file and self.quantities != ("dimensionless",):
                raise _refused(f"{short(given)} gives no unit; write it as text, for example {self._example()}")
            figure = given if isinstance(given, Figure) else Figure(float(given), quantity=self.quantities[0])
        else:
            raise _refused(f"{short(given)} is not a figure; write it as text, for example {self._example()}")
        if figure.sd is not None and figure.sd > self._most_sd(figure):
            says = "states a doubt that leaves nothing of the figure; allowed is up to half of it, of fouling all"
            raise _refused(f"{short(given)} {says}")
        if not (self.low <= figure <= self.high) or (self.above is not None and not figure > self.above):
            raise _refused(f"{short(given)} is out of bounds; allowed is {self.allowed()}")
        return figure

    @staticmethod
    def _most_sd(figure: Figure) -> float:
        """Beyond it an interval of first order means nothing; fouling is known so badly, and zero is told elsewhere."""
        if figure.quantity == "temperature":
            return 50.0
        size = abs(float(figure)) + (1e5 if figure.quantity == "pressure_gauge" else 0.0)
        return (size if figure.quantity == "fouling_resistance" else 0.5 * size) or float("inf")

    def _example(self) -> str:
        return f'"{self.example}"' if self.example else f'"{units.show(300.0, self.quantities[0], "si")}"'

    def __get_pydantic_core_schema__(self, source: Any, handler: GetCoreSchemaHandler) -> CoreSchema:
        optional = _optional(source)

        def validate(given: Any, info: core_schema.ValidationInfo[Any]) -> Figure | None:
            if given is None and optional:
                return None
            return self.read(given, file=bool(info.context and info.context.get("file")))

        return core_schema.with_info_plain_validator_function(validate)

    def __get_pydantic_json_schema__(self, schema: CoreSchema, handler: GetJsonSchemaHandler) -> dict[str, Any]:
        plain = self.quantities == ("dimensionless",)
        what = "A number" if plain else "A figure with its unit"
        return {
            "type": ["string", "number"] if plain else "string",
            "title": self.name,
            "description": _described(self.name, self.help, f"{what}, {self.allowed()}.", assumed=self.assumed),
            "examples": [self.example] if self.example else [],
        }


@dataclass(frozen=True)
class Count:
    """Declares a whole number of the input."""

    name: str
    low: int
    high: int
    help: str = ""
    assumed: str = ""
    example: str = ""

    def read(self, given: Any) -> int:
        if isinstance(given, float) and given.is_integer() and not isinstance(given, Figure):
            raise _refused(f"{short(given)} is not a whole number without a point; write {short(int(given))}")
        if isinstance(given, bool) or not isinstance(given, int):
            raise _refused(f"{short(given)} is not a whole number; allowed is {self.low} to {self.high}")
        if not self.low <= given <= self.high:
            raise _refused(f"{short(given)} is out of bounds; allowed is {self.low} to {self.high}")
        return given

    def __get_pydantic_core_schema__(self, source: Any, handler: GetCoreSchemaHandler) -> CoreSchema:
        return _reader(self.read, source)

    def __get_pydantic_json_schema__(self, schema: CoreSchema, handler: GetJsonSchemaHandler) -> dict[str, Any]:
        return {
            "type": "integer",
            "title": self.name,
            "description": _described(
                self.name, self.help, f"A whole number, {self.low} to {self.high}.", assumed=self.assumed
            ),
            "examples": [int(self.example)] if self.example else [],
            "minimum": self.low,
            "maximum": self.high,
        }


@dataclass(frozen=True)
class Choice:
    """Declares a pick from a closed list of words."""

    name: str
    options: tuple[str, ...]
    help: str = ""
    assumed: str = ""

    def read(self, given: Any) -> str:
        if isinstance(given, str):
            for option in self.options:
                if given.strip().lower() == option.lower():
                    return option
        near = _near(given, list(self.options), 0.5) if isinstance(given, str) else ""
        hint = f'; did you mean "{near}"?' if near else ""
        raise _refused(f"{short(given)} is not offered; allowed is {', '.join(self.options)}{hint}")

    def __get_pydantic_core_schema__(self, source: Any, handler: GetCoreSchemaHandler) -> CoreSchema:
        return _reader(self.read, source)

    def __get_pydantic_json_schema__(self, schema: CoreSchema, handler: GetJsonSchemaHandler) -> dict[str, Any]:
        return {
            "type": "string",
            "title": self.name,
            "description": _described(self.name, self.help, "One of the words of the list.", assumed=self.assumed),
            "enum": list(self.options),
        }


@dataclass(frozen=True)
class Words:
    """Declares a piece of free text, one line unless `lines`."""

    name: str
    longest: int = 200
    lines: bool = False
    help: str = ""
    example: str = ""

    def read(self, given: Any) -> str:
        if not isinstance(given, str):
            quoted = f'; write "{given}"' if isinstance(given, (int, float)) and not isinstance(given, bool) else ""
            raise _refused(f"{short(given)} is not text{quoted}")
        if len(given) > self.longest:
            raise _refused(f"is {len(given)} characters long; allowed is up to {self.longest}")
        if any(unicodedata.category(c) == "Cc" and not (self.lines and c in "\n\t\r") for c in given):
            raise _refused("holds control characters; allowed is plain text")
        if any("\ud800" <= c <= "\udfff" for c in given):
            raise _refused("holds half of a surrogate pair; allowed is plain text")
        return given

    def __get_pydantic_core_schema__(self, source: Any, handler: GetCoreSchemaHandler) -> CoreSchema:
        return _reader(self.read, source)

    def __get_pydantic_json_schema__(self, schema: CoreSchema, handler: GetJsonSchemaHandler) -> dict[str, Any]:
        return {
            "type": "string",
            "title": self.name,
            "description": _described(self.name, self.help, f"Text of up to {self.longest} characters."),
            "examples": [self.example] if self.example else [],
            "maxLength": self.longest,
        }


def _optional(source: Any) -> bool:
    return get_origin(source) in (Union, types.UnionType) and type(None) in get_args(source)


def _reader(read: Callable[[Any], Any], source: Any) -> CoreSchema:
    optional = _optional(source)
    return core_schema.no_info_plain_validator_function(
        lambda given: None if given is None and optional else read(given)
    )


def _described(name: str, *sentences: str, assumed: str = "") -> str:
    return " ".join(part for part in (f"{name}.", *sentences, f"When absent: {assumed}." if assumed else "") if part)


Declaration = Stated | Count | Choice | Words


class Input(BaseModel):
    """Base of everything a user can state: frozen, unknown keys refused."""

    model_config = ConfigDict(frozen=True, extra="forbid")

    def problems(self) -> Iterator[Problem]:
        """What does not go together in this part of the input; paths are relative to it."""
        return iter(())

    def checks(self) -> Iterable[Iterator[Problem]]:
        """The same check by check, so that one can fail for want of a field and the others still be made."""
        return (self.problems(),)

    @classmethod
    def idle(cls, given: Mapping[str, Any]) -> frozenset[str]:
        """Fields that decide nothing beside what is given, as typed or as read, of the others."""
        return frozenset()

    def leaves(self, path: str = "") -> Iterator[tuple[str, bool, Declaration | None, Any]]:
        """Path, whether it was stated, declaration and value of every field that is no group of fields."""
        declarations = type(self).declared()
        for name in type(self).model_fields:
            place, value = f"{path}.{name}" if path else name, getattr(self, name)
            if isinstance(value, Input):
                yield from value.leaves(place)
            else:
                yield place, name in self.model_fields_set, declarations.get(name), value

    @classmethod
    def declared(cls) -> Mapping[str, Declaration]:
        """Field name to declaration, for the fields that hold a single figure, count, choice or text."""
        return {
            name: item
            for name, field in cls.model_fields.items()
            for item in field.metadata
            if isinstance(item, (Stated, Count, Choice, Words))
        }


@dataclass(frozen=True, kw_only=True)
class Problem:
    """One thing wrong with an input: where, and a sentence that says what was given and what is allowed."""

    path: str
    says: str

    def __str__(self) -> str:
        return f"{self.path}: {self.says}" if self.path else self.says

    def under(self, place: str) -> Problem:
        return Problem(path=f"{place}.{self.path}" if self.path else place, says=self.says)


class CaseError(ValueError):
    """An input that cannot be used; carries every problem found at once."""

    def __init__(self, problems: Iterable[Problem]) -> None:
        self.problems = tuple(problems)
        super().__init__("\n".join(str(problem) for problem in self.problems))


Unions = Mapping[str, Collection[str]]
"""Key that holds one of several kinds, to the tags of those kinds."""


def problems_of(error: ValidationError, model: type[BaseModel], unions: Unions) -> list[Problem]:
    """pydantic's errors as sentences with the user's own paths."""
    found = []
    for item in error.errors(include_url=False, include_input=True):
        place = [step for before, step in pairwise(("", *item["loc"])) if step not in unions.get(str(before), ())]
        path = dotted(place)
        kind = item["type"]
        if kind == "extra_forbidden":
            says = _unknown_key(model, item["loc"], unions)
        elif kind == "missing":
            says = "is missing"
        elif kind == "stated":
            says = item["msg"]
        elif kind in ("model_type", "model_attributes_type", "dict_type"):
            says = f"{short(item['input'])} is not a group of keys in braces"
        elif kind in ("tuple_type", "list_type"):
            says = f"{short(item['input'])} is not a list in brackets"
        elif kind == "too_short":
            if len(item["input"]) >= item["ctx"]["min_length"]:
                continue  # only the entries that read are counted; what is wrong with the others is said there
            says = f"holds too few entries, {len(item['input'])}; allowed is {item['ctx']['min_length']} or more"
        elif kind == "too_long":
            says = f"holds too many entries, {len(item['input'])}; allowed is up to {item['ctx']['max_length']}"
        elif "says" in item.get("ctx", {}):
            path, says = _not_offered(path, item["input"], item["ctx"])
        else:
            says = f"{short(item['input'])} cannot be used"
        found.append(Problem(path=path, says=says))
    return found


def dotted(steps: Iterable[str | int]) -> str:
    """("fluid", "table", 1, "mu") as "fluid.table[1].mu"."""
    path = ""
    for step in steps:
        path += f"[{step}]" if isinstance(step, int) else f".{step}" if path else str(step)
    return path


def _unknown_key(model: type[BaseModel], place: tuple[str | int, ...], unions: Unions) -> str:
    """The sentence on a key that is not known where it stands, with the nearest one that is."""
    *way, key = place
    here = sorted(_fields(_models_at(model, way, unions)))
    tagged = len(way) > 1 and way[-1] in unions.get(str(way[-2]), ())
    kinds = _models_at(model, way[:-1], unions) if tagged else []
    if owners := [f'"{tag}"' for kind in kinds if key in kind.model_fields for tag in _tags(kind)]:
        return f'goes with {" or ".join(owners)}, not with "{way[-1]}"; known here: {", ".join(here)}'
    near = _near(str(key), here, 0.6) or _near(str(key), sorted(_fields(kinds)), 0.6) or _near(str(key), here, 0.4)
    return "is not a known key; " + (f'did you mean "{near}"?' if near else f"known here: {', '.join(here)}")


def _not_offered(path: str, given: Any, context: Mapping[str, Any]) -> tuple[str, str]:
    """Place and sentence where no kind of a union was meant; `key` of the context is the one that says which."""
    key = context.get("key")
    if key is None or not isinstance(given, dict):
        return path, f"{short(given)} {context['says']}"
    if key not in given:
        return dotted((path, key)), f"is missing; allowed is {context['allowed']}"
    return dotted((path, key)), f"{short(given[key])} is not offered; allowed is {context['allowed']}"


def _models_at(model: type[BaseModel], steps: Iterable[str | int], unions: Unions) -> list[type[BaseModel]]:
    """The groups of keys that may stand at a place: all kinds of a union, or the one whose tag is the last step."""
    at: list[type[BaseModel]] = [model]
    for before, step in pairwise(("", *steps)):
        if step in unions.get(str(before), ()):
            at = [part for part in at if step in _tags(part)]
        elif isinstance(step, str):
            at = [m for part in at if step in part.model_fields for m in _models(part.model_fields[step].annotation)]
    return at


def _fields(models: Iterable[type[BaseModel]]) -> set[str]:
    return {field.alias or name for model in models for name, field in model.model_fields.items()}


def _tags(model: type[BaseModel]) -> set[str]:
    kind = model.model_fields.get("type")
    tag = getattr(model, "tag_name", None)
    return {str(tag)} if tag else set(get_args(kind.annotation)) if kind else set()


def _models(annotation: Any) -> list[type[BaseModel]]:
    if isinstance(annotation, type) and issubclass(annotation, BaseModel):
        return [annotation]
    return [model for part in get_args(annotation) for model in _models(part)]


def _near(word: str, known: list[str], cutoff: float) -> str:
    """The longest known word that begins the given one, or one that it begins, else the one most like it, else ""."""
    folded = word.lower()
    begun = [
        k
        for k in known
        if min(len(k), len(word)) > 2 and (folded.startswith(k.lower()) or k.lower().startswith(folded))
    ]
    return next(iter(sorted(begun, key=len, reverse=True) or difflib.get_close_matches(word, known, 1, cutoff)), "")


def _refused(sentence: str) -> PydanticCustomError:
    # Half of a surrogate pair is no text that could be shown or kept.
    sound = sentence.encode("utf-8", "replace").decode()
    return PydanticCustomError("stated", "{sentence}", {"sentence": sound})


def short(given: Any) -> str:
    """What was given, as it stands in a file, cut where it is long."""
    try:
        text = json.dumps(given, ensure_ascii=False)
    except (TypeError, ValueError, RecursionError):
        text = f"something of the type {type(given).__name__}"
    return text if len(text) <= 60 else f"{text[:50]}… ({len(text)} characters)"
