"""What a report is made of: sections of paragraphs, tables and figures held as data, for whatever draws them."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from engine.exchangers.tube_field import TubeField
from engine.stated import Side


@dataclass(frozen=True, kw_only=True)
class Table:
    """Rows of text. A cell may hold line breaks; `widths` are relative; `roomy` rows leave space to write in, `fine`
    ones are to look up rather than to read."""

    header: tuple[str, ...]
    rows: tuple[tuple[str, ...], ...]
    title: str = ""
    widths: tuple[float, ...] = ()
    roomy: bool = False
    fine: bool = False


@dataclass(frozen=True, kw_only=True)
class Columns:
    """Columns of tables, side by side where there is room, else one below the other; `widths` are relative."""

    columns: tuple[tuple[Table, ...], ...]
    widths: tuple[float, ...]

    @property
    def tables(self) -> tuple[Table, ...]:
        return tuple(table for column in self.columns for table in column)


@dataclass(frozen=True, kw_only=True)
class Line:
    """One line of a chart; `dash` [pt on, pt off] and `marker` tell it from the others without colour."""

    name: str
    y: tuple[float, ...]
    dash: tuple[float, ...] = ()
    marker: str = ""


@dataclass(frozen=True, kw_only=True)
class Strip:
    """A named strip below a chart: where along x what holds, as (from, to, what)."""

    name: str
    runs: tuple[tuple[float, float, str], ...]


@dataclass(frozen=True, kw_only=True)
class Chart:
    """Lines over x from 0 to 1, figures in the report's units. `marks` are x at which something begins, such as a leg.

    `alt` says in words what the figure shows.
    """

    x: tuple[float, ...]
    x_label: str
    y_label: str
    lines: tuple[Line, ...]
    strips: tuple[Strip, ...] = ()
    marks: tuple[float, ...] = ()
    alt: str = ""


@dataclass(frozen=True, kw_only=True)
class Flow:
    """One stream of a scheme, in words ready to be written at its ends."""

    name: str
    fluid: str
    hot: bool
    flow: str
    T_in: str
    T_out: str
    split: bool = False
    """Over the banks; else it visits them in turn."""


@dataclass(frozen=True, kw_only=True)
class DoublePipeScheme:
    """A double pipe as it is piped: legs in series within a bank, banks, and what flows where."""

    counter: bool
    legs: int
    banks: int
    flows: Mapping[Side, Flow]
    caption: str
    """What its drawing leaves out."""
    ends: str

    @property
    def alt(self) -> str:
        return f"{self.caption} {self.ends}"


@dataclass(frozen=True, kw_only=True)
class ShellScheme:
    """One shell of a shell-and-tube exchanger, and how many there are."""

    letter: str
    """TEMA letter of the shell."""
    first_pass_counter: bool
    tube_passes: int
    u_tubes: bool
    baffles: int
    shells_in_series: int
    shells_in_parallel: int
    flows: Mapping[Side, Flow]
    caption: str
    """What its drawing leaves out."""
    ends: str

    @property
    def alt(self) -> str:
        return f"{self.caption} {self.ends}"


@dataclass(frozen=True, kw_only=True)
class Bundle:
    """The cross-section of a bundle to scale, and what to know of it, line by line."""

    field: TubeField
    legend: tuple[str, ...]

    @property
    def alt(self) -> str:
        return f"{'. '.join(self.legend)}."


Figure = Chart | DoublePipeScheme | ShellScheme | Bundle
Block = str | Table | Columns | Figure


@dataclass(frozen=True, kw_only=True)
class Section:
    """One heading and what stands under it; a string is a paragraph."""

    key: str
    title: str
    blocks: tuple[Block, ...]
