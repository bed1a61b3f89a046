"""The exchanger and what was typed about it: a scheme, the inputs with their origin, and what was derived from them."""

from __future__ import annotations

from collections.abc import Callable, Collection, Iterator, Mapping, Sequence
from itertools import groupby
from typing import Any

from pydantic import ValidationError

from engine.case import Case, ConstantFluid, SteamFluid, Stream, TableFluid
from engine.correlations import Source
from engine.exchangers import Derived
from engine.exchangers.double_pipe import DoublePipe
from engine.exchangers.shell_and_tube import ShellAndTube
from engine.exchangers.tube_field import tube_field
from engine.report.blocks import Block, Bundle, Columns, DoublePipeScheme, Flow, ShellScheme, Table
from engine.report.words import Words, capital, fluid_name, listed
from engine.stated import SIDES, Choice, Count, Input, Side, Stated

STATED, ASSUMED, NOT_STATED, MISSING = "stated", "assumed: ", "not stated", "is missing"


def scheme(case: Case, words: Words, T_out: Mapping[Side, str]) -> Block:
    """The exchanger as it is piped, with its terminal temperatures; `T_out` in words."""
    exchanger, flows = case.exchanger, {side: _flow(case, words, side, T_out[side]) for side in SIDES}
    ends = " ".join(
        f"{flow.name} ({'hot' if flow.hot else 'cold'}): {flow.fluid}, {flow.flow}, {flow.T_in} to {flow.T_out}."
        for flow in (flows[case.hot], flows[case.cold])
    )
    if isinstance(exchanger, ShellAndTube):
        return ShellScheme(
            letter=exchanger.shell_letter,
            first_pass_counter=exchanger.first_pass == "counter",
            tube_passes=exchanger.tube_passes,
            u_tubes=exchanger.u_tubes,
            baffles=0 if exchanger.shell_letter == "X" else exchanger.baffle_count,
            shells_in_series=exchanger.shells_in_series,
            shells_in_parallel=exchanger.shells_in_parallel,
            flows=flows,
            caption=f"{exchanger.title} {exchanger.tema.upper()}, {exchanger.shell_type.name}; {exchanger.tubes} tubes "
            f"in {_counted(exchanger.tube_passes, 'pass', 'passes')} of {words.typed(exchanger.tube_length)}; "
            f"{_counted(exchanger.shells_in_series, 'shell', 'shells')} in series, "
            f"{_counted(exchanger.shells_in_parallel, 'train', 'trains')}.",
            ends=ends,
        )
    legs = _counted(exchanger.legs_in_series, "leg", "legs in series")
    banks = ""
    if exchanger.banks > 1:
        ways = [f"{flow.name.lower()} {'split over them' if flow.split else 'in turn'}" for flow in flows.values()]
        banks = f" in each of {exchanger.banks} banks, {listed(ways)}"
    return DoublePipeScheme(
        counter=exchanger.arrangement == "counter",
        legs=exchanger.legs_in_series,
        banks=exchanger.banks,
        flows=flows,
        caption=f"{exchanger.title}, {exchanger.arrangement}; {legs} of {words.typed(exchanger.leg_length)}{banks}.",
        ends=ends,
    )


DRAWN = ("tema", "shell_id", "tube_od", "tube_pitch", "tubes", "tube_passes", "bundle_diameter", "baffle_cut")
"""What must be sound of an exchanger for its bundle to be drawn."""


def stated_bundle(given: Mapping[str, Any], system: str = "si") -> Bundle | None:
    """The bundle of an exchanger as typed, while the case is still incomplete; None where too little is sound."""
    if given.get("type") != "shell-and-tube":
        return None
    try:
        exchanger = ShellAndTube.model_validate(dict(given))
    except ValidationError:
        return None
    if any(problem.path in DRAWN and problem.says != MISSING for problem in exchanger.problems()):
        return None
    return bundle(exchanger, Words(system))


def bundle(exchanger: ShellAndTube, words: Words) -> Bundle:
    """The cross-section of one shell, in figures of a system of units."""
    field, passes, pairs = tube_field(exchanger), exchanger.tube_passes, exchanger.sealing_strip_pairs
    bore, od, pitch = (words.typed(value) for value in (exchanger.shell_id, exchanger.tube_od, exchanger.tube_pitch))
    legend = [
        "Cross-section of one shell, to scale; the shell-side fluid crosses it upright",
        f"Shell bore {bore}, outer tube limit {words.show(2 * field.bundle_radius, 'length')}",
        f"{exchanger.tubes} tubes of {od} at {exchanger.layout_angle}, pitch {pitch}",
        _counted(passes, "tube pass", "tube passes") + ", the even ones grey" * (passes > 1),
        f"Only {field.capacity} of {field.tubes} tubes find a place: check bore, pitch, layout and count"
        if field.capacity < field.tubes
        else f"Places for {field.capacity}, tie rods and impingement plates not counted",
    ]
    if field.cut_y is not None:
        legend.append(f"Baffle cut {words.typed(exchanger.baffle_cut)}; full and broken line: their edges, in turn")
    if pairs:
        legend.append(_counted(pairs, "pair of sealing strips", "pairs of sealing strips"))
    legend.append("Laid out from the stated figures, not from the drawing of what was built")
    return Bundle(field=field, legend=tuple(legend))


def _counted(n: int, one: str, many: str) -> str:
    return f"{n} {one if n == 1 else many}"


def _flow(case: Case, words: Words, side: Side, T_out: str) -> Flow:
    flow, exchanger = case.flow(side), case.exchanger
    return Flow(
        name=exchanger.side_names[side],
        fluid=fluid_name(case.stream(side)),
        hot=side == case.hot,
        flow=words.show(flow, "mass_flow") if flow else "flow as condensed",
        T_in=words.show(case.T_in(side), "temperature"),
        T_out=T_out,
        split=isinstance(exchanger, DoublePipe) and exchanger.branches(side) > 1,
    )


def inputs(case: Case, words: Words, cite: Callable[[Source], str]) -> Iterator[Block]:
    """All that was typed, as it was typed, with what was assumed in its place where nothing was.

    `cite` gives the number of a source.
    """
    names = case.exchanger.side_names
    yield Table(
        header=("Streams as typed", *(names[side] for side in SIDES)),
        rows=tuple(_stream_rows(case, words)),
        widths=(1.3, 2, 2),
    )
    for side in SIDES:
        yield from _typed_properties(case.stream(side), words)
    rows = list(_exchanger_rows(case, words, cite))
    stated = tuple((label, value) for label, value, origin in rows if origin == STATED)
    taken = tuple((label, value, origin.removeprefix(ASSUMED)) for label, value, origin in rows if origin != STATED)
    limits = tuple((label, value) for label, value, _ in _rows(case.limits, words))
    typed = [Table(header=(case.exchanger.title, "As typed"), rows=stated, widths=(1, 1.4))]
    if limits:
        typed.append(Table(header=("Limits", "As typed"), rows=limits, widths=(1, 1.4)))
    yield Columns(
        columns=(
            tuple(typed),
            (Table(header=("Not stated, so taken", "Value", "Origin"), rows=taken, widths=(1.5, 1.1, 2)),),
        ),
        widths=(1, 1.4),
    )
    if not limits:
        yield "No design pressure, design temperature or other limit of the equipment is stated."
    if case.notes.strip():
        yield f"Notes: {case.notes.strip()}"


def _stream_rows(case: Case, words: Words) -> Iterator[tuple[str, ...]]:
    streams = [case.stream(side) for side in SIDES]
    yield ("Fluid", *(fluid_name(stream) for stream in streams))
    for name, declared in Stream.declared().items():
        yield (declared.name, *(_stream_cell(stream, name, declared, words) for stream in streams))
    fluids = [case.fluid(side) for side in SIDES]
    yield ("Phase; property data", *(f"{fluid.phase}; {fluid.origin}" for fluid in fluids))
    yield ("Mass flow", *(words.show(case.flow(side), "mass_flow") for side in SIDES))
    yield ("Inlet pressure, absolute", *(words.show(case.p_in(side), "pressure_absolute") for side in SIDES))


def _stream_cell(stream: Stream, name: str, declared: Any, words: Words) -> str:
    value = getattr(stream, name)
    if value is None:
        return NOT_STATED
    text = words.typed(value, declared)
    return text if name in stream.model_fields_set else f"{text}, assumed: {declared.assumed}"


def _typed_properties(stream: Stream, words: Words) -> Iterator[Block]:
    fluid = stream.fluid
    if isinstance(fluid, SteamFluid):
        yield Table(
            header=("Steam as typed", "Value", "Origin"), rows=tuple(_rows(fluid.steam, words)), widths=(1.3, 2, 2)
        )
        return
    if isinstance(fluid, TableFluid):
        rows: Sequence[Input] = fluid.table
    elif isinstance(fluid, ConstantFluid):
        rows = [fluid.constant]
    else:
        return
    declared = type(rows[0]).declared()
    yield Table(
        header=tuple(item.name for item in declared.values()),
        rows=tuple(tuple(words.typed(getattr(row, name), item) for name, item in declared.items()) for row in rows),
        title=f"Properties of {fluid.name} as typed",
    )


def _rows(part: Input, words: Words, idle: Collection[str] = ()) -> Iterator[tuple[str, str, str]]:
    """What is stated or assumed in a part of the input: trade name, value, origin. A group of keys is one row; no
    default is shown of a field that is idle."""
    declared = type(part).declared()
    for name in type(part).model_fields:
        value, item = getattr(part, name), declared.get(name)
        if isinstance(value, Input):
            inner = list(_rows(value, words))
            if inner:
                text = ", ".join(f"{label.lower()} {cell}" for label, cell, _ in inner)
                origin = "; ".join(dict.fromkeys(row[2] for row in inner)).replace(f"; {ASSUMED}", "; ")
                yield _spelt(name), text, origin
        elif item is None or value is None:
            continue
        elif name in part.model_fields_set:
            yield item.name, words.typed(value, item), STATED
        elif isinstance(item, (Stated, Count, Choice)) and item.assumed and name not in idle:
            yield item.name, words.typed(value, item), f"{ASSUMED}{item.assumed}"


def _exchanger_rows(case: Case, words: Words, cite: Callable[[Source], str]) -> Iterator[tuple[str, str, str]]:
    """Of the exchanger, with what follows from it, and of the atmosphere that gauge pressures stand on."""
    exchanger, derived = case.exchanger, case.exchanger.derived()
    idle = frozenset(path.removeprefix("exchanger.") for path in case.idle_fields)
    sizes = {
        _label(exchanger, size): f": {', '.join(_figure(exchanger, f, words) for f in found)} {cite(found[0].source)}"
        for size, found in ((size, list(group)) for size, group in groupby(derived, lambda figure: figure.size))
        if size
    }
    for label, value, origin in _rows(exchanger, words, idle):
        yield label, value + sizes.get(label, ""), origin
    atmosphere = Case.declared()["atmosphere"].name
    yield from (row for row in _rows(case, words, idle) if row[0] == atmosphere)
    for figure in derived:
        if not figure.size:
            rated = figure.path in exchanger.model_fields_set
            label = _label(exchanger, figure.path) + (", as rated" if rated else "")
            yield label, _figure(exchanger, figure, words), f"derived {cite(figure.source)}"
    yield "Heat-transfer area", words.show(exchanger.area, "area"), "derived: outside, bare"


def _label(part: Input, name: str) -> str:
    declared = type(part).declared()
    return declared[name].name if name in declared else _spelt(name)


def _figure(exchanger: Any, figure: Derived, words: Words) -> str:
    """A derived figure, of a stated size with its name."""
    text = words.plain(figure.value, figure.quantity) if figure.quantity else f"{figure.value:.0f}"
    group, _, name = figure.path.rpartition(".")
    return f"{_label(getattr(exchanger, group) if group else exchanger, name).lower()} {text}" if figure.size else text


def _spelt(name: str) -> str:
    return capital(name.replace("_", " "))
