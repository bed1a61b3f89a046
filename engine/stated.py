"""How an input is declared, once: quantity, trade name, bounds, help. The form, the case file, its validation, its
JSON Schema and the report's input table all read that declaration.
"""

from __future__ import annotations

import difflib
import types
from collections.abc import Iterable, Iterator, Mapping
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
                raise _refused(f"{_short(given)} gives no unit; write it as text, for example {self._example()}")
            figure = given if isinstance(given, Figure) else Figure(float(given), quantity=self.quantities[0])
        else:
            raise _refused(f"{_short(given)} is not a figure; write it as text, for example {self._example()}")
        if not (self.low <= figure <= self.high) or (self.above is not None and not figure > self.above):
            raise _refused(f"{_short(given)} is out of bounds; allowed is {self.allowed()}")
        return figure

    def _example(self) -> str:
        return f'"{self.example}"' if self.example else f'"{units.show(300.0, self.quantities[0], "si")}"'

    def __get_pydantic_core_schema__(self, source: Any, handler: GetCoreSchemaHandler) -> CoreSchema:
        optional = get_origin(source) in (Union, types.UnionType) and type(None) in get_args(source)

        def validate(given: Any, info: core_schema.ValidationInfo[Any]) -> Figure | None:
            if given is None and optional:
                return None
            return self.read(given, file=bool(info.context and info.context.get("file")))

        return core_schema.with_info_plain_validator_function(validate)

    def __get_pydantic_json_schema__(self, schema: CoreSchema, handler: GetJsonSchemaHandler) -> dict[str, Any]:
        return {
            "type": "string",
            "title": self.name,
            "description": f"{self.help} A figure with its unit; {self.allowed()}.".strip(),
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

    def read(self, given: Any) -> int:
        if isinstance(given, float) and given.is_integer() and not isinstance(given, Figure):
            raise _refused(f"{given!r} is not a whole number without a point; write {int(given)}")
        if isinstance(given, bool) or not isinstance(given, int):
            raise _refused(f"{_short(given)} is not a whole number; allowed is {self.low} to {self.high}")
        if not self.low <= given <= self.high:
            raise _refused(f"{_short(given)} is out of bounds; allowed is {self.low} to {self.high}")
        return given

    def __get_pydantic_core_schema__(self, source: Any, handler: GetCoreSchemaHandler) -> CoreSchema:
        optional = get_origin(source) in (Union, types.UnionType) and type(None) in get_args(source)
        return core_schema.no_info_plain_validator_function(
            lambda given: None if given is None and optional else self.read(given)
        )

    def __get_pydantic_json_schema__(self, schema: CoreSchema, handler: GetJsonSchemaHandler) -> dict[str, Any]:
        return {
            "type": "integer",
            "title": self.name,
            "description": self.help,
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
        near = difflib.get_close_matches(str(given), self.options, 1, 0.5) if isinstance(given, str) else []
        hint = f'; did you mean "{near[0]}"?' if near else ""
        raise _refused(f"{_short(given)} is not offered; allowed is {', '.join(self.options)}{hint}")

    def __get_pydantic_core_schema__(self, source: Any, handler: GetCoreSchemaHandler) -> CoreSchema:
        optional = get_origin(source) in (Union, types.UnionType) and type(None) in get_args(source)
        return core_schema.no_info_plain_validator_function(
            lambda given: None if given is None and optional else self.read(given)
        )

    def __get_pydantic_json_schema__(self, schema: CoreSchema, handler: GetJsonSchemaHandler) -> dict[str, Any]:
        return {"type": "string", "title": self.name, "description": self.help, "enum": list(self.options)}


@dataclass(frozen=True)
class Words:
    """Declares a piece of free text, one line unless `lines`."""

    name: str
    longest: int = 200
    lines: bool = False
    help: str = ""

    def read(self, given: Any) -> str:
        if not isinstance(given, str):
            raise _refused(f"{_short(given)} is not text")
        if len(given) > self.longest:
            raise _refused(f"is {len(given)} characters long; allowed is up to {self.longest}")
        if any(ord(c) < 32 and not (self.lines and c in "\n\t\r") for c in given):
            raise _refused("holds control characters; allowed is plain text")
        if any("\ud800" <= c <= "\udfff" for c in given):
            raise _refused("holds half of a surrogate pair; allowed is plain text")
        return given

    def __get_pydantic_core_schema__(self, source: Any, handler: GetCoreSchemaHandler) -> CoreSchema:
        return core_schema.no_info_plain_validator_function(self.read)

    def __get_pydantic_json_schema__(self, schema: CoreSchema, handler: GetJsonSchemaHandler) -> dict[str, Any]:
        return {"type": "string", "title": self.name, "description": self.help, "maxLength": self.longest}


Declaration = Stated | Count | Choice | Words


class Input(BaseModel):
    """Base of everything a user can state: frozen, unknown keys refused."""

    model_config = ConfigDict(frozen=True, extra="forbid")

    def problems(self) -> Iterator[Problem]:
        """What does not go together in this part of the input; paths are relative to it."""
        return iter(())

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


def problems_of(error: ValidationError, model: type[BaseModel], tags: frozenset[str]) -> list[Problem]:
    """pydantic's errors as sentences with the user's own paths. `tags` are union labels to leave out of the path."""
    found = []
    for item in error.errors(include_url=False, include_input=True):
        # A tag stands once, right after the key that holds the union; a field may bear the same name.
        place = tuple(step for before, step in pairwise(("", *item["loc"])) if step not in tags or before in tags)
        path = dotted(place)
        kind = item["type"]
        if kind == "extra_forbidden":
            names = list(_fields_at(model, item["loc"][:-1]))
            near = difflib.get_close_matches(str(item["loc"][-1]), names, 1, 0.4)
            hint = f'; did you mean "{near[0]}"?' if near else f"; known here: {', '.join(sorted(names))}"
            says = f"is not a known key{hint}"
        elif kind == "missing":
            says = "is missing"
        elif kind == "stated":
            says = item["msg"]
        elif kind in ("model_type", "model_attributes_type", "dict_type"):
            says = f"{_short(item['input'])} is not a group of keys in braces"
        elif kind in ("tuple_type", "list_type"):
            says = f"{_short(item['input'])} is not a list in brackets"
        elif kind == "too_short":
            says = f"holds too few entries; allowed is {item['ctx']['min_length']} or more"
        elif kind == "too_long":
            says = f"holds too many entries; allowed is up to {item['ctx']['max_length']}"
        elif "says" in item.get("ctx", {}):
            says = f"{_short(item['input'])} {item['ctx']['says']}"
        elif kind in ("union_tag_not_found", "union_tag_invalid"):
            says = f"{_short(item['input'])} is not of a known kind"
        else:
            says = f"{_short(item['input'])} cannot be used: {item['msg'][0].lower()}{item['msg'][1:]}"
        found.append(Problem(path=path, says=says))
    return found


def dotted(steps: Iterable[str | int]) -> str:
    """("fluid", "table", 1, "mu") as "fluid.table[1].mu"."""
    path = ""
    for step in steps:
        path += f"[{step}]" if isinstance(step, int) else f".{step}" if path else str(step)
    return path


def _fields_at(model: type[BaseModel], steps: Iterable[str | int]) -> Iterator[str]:
    """Names of the keys that are known at a place, union members included."""
    at: list[type[BaseModel]] = [model]
    for step in steps:
        if isinstance(step, int):
            continue
        inner = [m for part in at if step in part.model_fields for m in _models(part.model_fields[step].annotation)]
        at = inner or [part for part in at if step in _tags(part)] or at
    for part in at:
        yield from (field.alias or name for name, field in part.model_fields.items())


def _tags(model: type[BaseModel]) -> set[str]:
    kind = model.model_fields.get("type")
    tag = getattr(model, "tag_name", None)
    return {str(tag)} if tag else set(get_args(kind.annotation)) if kind else set()


def _models(annotation: Any) -> list[type[BaseModel]]:
    if isinstance(annotation, type) and issubclass(annotation, BaseModel):
        return [annotation]
    return [model for part in get_args(annotation) for model in _models(part)]


def _refused(sentence: str) -> PydanticCustomError:
    return PydanticCustomError("stated", "{sentence}", {"sentence": sentence})


def _short(given: Any) -> str:
    text = f'"{given}"' if isinstance(given, str) else repr(given)
    return text if len(text) <= 60 else f"{text[:50]}… ({len(text)} characters)"
