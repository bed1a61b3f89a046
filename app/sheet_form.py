"""The figures of a datasheet as a form, grouped by what the checks need together."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence

import streamlit as st

import engine
from app import fields, session
from app.fields import Part, Path
from app.inputs import Form, Problems

SHEET: Path = ("sheet",)
PHASES = "Phases at inlet and outlet"
SIDE_GROUPS: Mapping[str, tuple[str, ...]] = {
    "": ("fluid", "flow", "T_in", "T_out", "p_in", "p_out", "dp", "dp_allowed", "R_fouling", "velocity", "h"),
    "Properties": ("rho", "cp", "mu", "k", "molar_mass"),
    "Properties at inlet and outlet": tuple(
        f"{name}_{end}" for name in ("rho", "cp", "mu", "k") for end in ("in", "out")
    ),
    PHASES: (
        *(
            f"{part}_{end}"
            for part in ("vapour", "liquid", "steam", "water", "noncondensables")
            for end in ("in", "out")
        ),
        "latent_heat",
    ),
    "Design, nozzle, turndown": (),
}
"""Fields of a side by fold; the nameless ones stand in the open, the last fold takes what no other has."""
WHOLE_GROUPS: Mapping[str, tuple[str, ...]] = {
    "Duty, surface and transfer rates": (
        "duty", "area", "mtd", "lmtd", "F", "U_service", "U_dirty", "U_clean", "excess_area", "wall_resistance",
        "area_per_shell", "area_kind", "basis",
    ),
    "Shells and tubes": (
        "tema", "shells_in_series", "shells_in_parallel", "shell_id", "tubes", "tubes_are", "tube_od", "tube_wall",
        "tube_wall_is", "gauge", "tube_id", "tube_length", "tube_pitch", "layout_angle", "tube_passes", "material",
        "wall_conductivity",
    ),
    "Baffles and bundle": (
        "baffles", "baffle_cut", "baffle_cut_by", "baffle_spacing", "inlet_spacing", "outlet_spacing",
        "bundle_diameter", "sealing_strip_pairs", "tubesheet_thickness",
    ),
    "Double pipe": ("arrangement", "leg_length", "legs_in_series", "banks_in_parallel"),
    "About the sheet": ("item", "revision", "date", "status", "guarantee"),
    "Further entries": (),
}  # fmt: skip
PIPES = ("inner_pipe", "outer_pipe")
OPEN = ("Duty, surface and transfer rates", "Shells and tubes")


def show(problems: Sequence[engine.Problem], side_names: Mapping[str, str]) -> None:
    """Every field of the sheet; what the engine says to one stands under it."""
    raw = session.case()
    form = Form(Problems([problem.under("sheet") for problem in problems], raw))
    sheet = next(part for part in fields.parts(engine.Case) if part.name == "sheet").models[0]
    for side, place in zip(engine.SIDES, st.columns(2, gap="large"), strict=True):
        with place:
            st.subheader(side_names[side], anchor=False)
            form.said((*SHEET, side), sheet)
            _groups(form, _model(sheet, side), (*SHEET, side), SIDE_GROUPS, 2, ("",))
    _groups(form, sheet, SHEET, WHOLE_GROUPS, 4, OPEN)


def _model(sheet: type[engine.Input], name: str) -> type[engine.Input]:
    return next(part for part in fields.parts(sheet) if part.name == name).models[0]


def _groups(
    form: Form,
    model: type[engine.Input],
    path: Path,
    groups: Mapping[str, tuple[str, ...]],
    columns: int,
    unfolded: Sequence[str],
) -> None:
    """The boxes of a model by group, some of them in the open and the others in folds."""
    boxes = {part.name: part for part in fields.parts(model) if part.shape == "box"}
    named = {name for names in groups.values() for name in names}
    for title, names in groups.items():
        inner = [boxes[name] for name in names] or [part for name, part in boxes.items() if name not in named]
        pipes = [(*path, pipe) for pipe in PIPES] if title == "Double pipe" else []
        draw = _drawn(form, inner, path, columns, pipes, model)
        if title in unfolded:
            if title:
                st.subheader(title, anchor=False)
            draw()
        else:
            form.fold(title, [*((*path, part.name) for part in inner), *pipes], draw)


def _drawn(
    form: Form, inner: Sequence[Part], path: Path, columns: int, pipes: Sequence[Path], model: type[engine.Input]
) -> Callable[[], None]:
    def draw() -> None:
        form.boxes(inner, path, columns, within=path)
        for pipe in pipes:
            st.markdown(f"**{str(pipe[-1]).replace('_', ' ').capitalize()}**")
            form.said(pipe, model)
            form.boxes(fields.parts(_model(model, str(pipe[-1]))), pipe, columns, within=pipe)

    return draw
