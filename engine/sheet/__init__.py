"""A vendor's datasheet as stated: every figure optional, each kept as typed, digits and all.

Names are those of the case. A side's figures may be typed under the side or with a dotted key, "inside.T_out".
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Annotated, Any

from pydantic import model_validator

from engine.exchangers.double_pipe import Pipe, length
from engine.stated import SIDES, Choice, Count, Declaration, Figure, Input, Side, Stated, Words

PRESSURE = ("pressure_gauge", "pressure_absolute")
VISCOSITY = ("viscosity", "kinematic_viscosity")
PARTS = ("vapour", "liquid", "steam", "water", "noncondensables")
"""What a side's flow may consist of at its inlet and at its outlet; water and steam are counted apart."""


def _part(name: str) -> Stated:
    return Stated("mass_flow", name, low=0.0, high=1e5, example="18 t/h")


def _temperature(name: str, example: str = "52 degC") -> Stated:
    return Stated("temperature", name, low=50.0, high=1500.0, example=example)


def _pressure(name: str, help: str = "Absolute or gauge, as its unit says.") -> Stated:
    return Stated(PRESSURE, name, help=help, low=-101325.0, high=1e8, example="4.2 barg")


def _drop(name: str) -> Stated:
    return Stated("pressure_difference", name, low=0.0, high=1e7, example="70 kPa")


def _density(name: str) -> Stated:
    return Stated("density", name, above=0.0, high=25000.0, example="862 kg/m3")


def _viscosity(name: str) -> Stated:
    return Stated(VISCOSITY, name, above=0.0, high=1e5, example="39.6 cP")


def _specific_heat(name: str) -> Stated:
    return Stated("specific_heat", name, above=0.0, high=1e6, example="1.95 kJ/kgK")


def _conductivity(name: str, example: str = "0.131 W/mK") -> Stated:
    return Stated("conductivity", name, above=0.0, high=1000.0, example=example)


def _velocity(name: str) -> Stated:
    return Stated("velocity", name, above=0.0, high=500.0, example="1.4 m/s")


def _coefficient(name: str, help: str = "") -> Stated:
    return Stated("heat_transfer_coefficient", name, help=help, above=0.0, high=1e6, example="740 W/m2K")


def _fouling(name: str, help: str) -> Stated:
    return Stated("fouling_resistance", name, help=help, low=0.0, high=10.0, example="0.00018 m2K/W")


def _area(name: str, help: str = "") -> Stated:
    return Stated("area", name, help=help, above=0.0, high=1e6, example="85 m2")


def _mass(name: str) -> Stated:
    return Stated("mass", name, above=0.0, high=1e7, example="5400 kg")


def _momentum(name: str) -> Stated:
    return Stated("momentum_flux", name, low=0.0, high=1e7, example="1800 kg/m.s2")


class SheetSide(Input):
    """What a datasheet prints of one side. A property without `_in` or `_out` is that of the mean temperature."""

    fluid: Annotated[str | None, Words("Fluid", 80)] = None
    flow: Annotated[
        float | None,
        Stated(("mass_flow", "volume_flow"), "Total flow", above=0.0, high=1e5, example="18 t/h"),
    ] = None
    flow_min: Annotated[float | None, Stated("mass_flow", "Flow at turndown", above=0.0, high=1e5, example="6 t/h")] = (
        None
    )
    vapour_in: Annotated[float | None, _part("Vapour, in")] = None
    vapour_out: Annotated[float | None, _part("Vapour, out")] = None
    liquid_in: Annotated[float | None, _part("Liquid, in")] = None
    liquid_out: Annotated[float | None, _part("Liquid, out")] = None
    steam_in: Annotated[float | None, _part("Steam, in")] = None
    steam_out: Annotated[float | None, _part("Steam, out")] = None
    water_in: Annotated[float | None, _part("Water, in")] = None
    water_out: Annotated[float | None, _part("Water, out")] = None
    noncondensables_in: Annotated[float | None, _part("Noncondensables, in")] = None
    noncondensables_out: Annotated[float | None, _part("Noncondensables, out")] = None

    T_in: Annotated[float | None, _temperature("Temperature, in", "27 degC")] = None
    T_out: Annotated[float | None, _temperature("Temperature, out")] = None
    p_in: Annotated[float | None, _pressure("Pressure, in")] = None
    p_out: Annotated[float | None, _pressure("Pressure, out")] = None

    rho: Annotated[float | None, _density("Density, mean")] = None
    rho_in: Annotated[float | None, _density("Density, in")] = None
    rho_out: Annotated[float | None, _density("Density, out")] = None
    mu: Annotated[float | None, _viscosity("Viscosity, mean")] = None
    mu_in: Annotated[float | None, _viscosity("Viscosity, in")] = None
    mu_out: Annotated[float | None, _viscosity("Viscosity, out")] = None
    cp: Annotated[float | None, _specific_heat("Specific heat, mean")] = None
    cp_in: Annotated[float | None, _specific_heat("Specific heat, in")] = None
    cp_out: Annotated[float | None, _specific_heat("Specific heat, out")] = None
    k: Annotated[float | None, _conductivity("Thermal conductivity, mean")] = None
    k_in: Annotated[float | None, _conductivity("Thermal conductivity, in")] = None
    k_out: Annotated[float | None, _conductivity("Thermal conductivity, out")] = None
    latent_heat: Annotated[
        float | None, Stated("specific_enthalpy", "Latent heat", above=0.0, high=1e8, example="2133 kJ/kg")
    ] = None
    molar_mass: Annotated[
        float | None, Stated("molar_mass", "Molar mass of the gas", above=0.0, high=2.0, example="28.97 kg/kmol")
    ] = None

    velocity: Annotated[float | None, _velocity("Velocity")] = None
    dp: Annotated[float | None, _drop("Pressure drop, calculated")] = None
    dp_allowed: Annotated[float | None, _drop("Pressure drop, allowable")] = None
    dp_basis: Annotated[str | None, Choice("Pressure drop holds", ("clean", "fouled"))] = None
    R_fouling: Annotated[float | None, _fouling("Fouling resistance", "On this side's own surface.")] = None
    h: Annotated[float | None, _coefficient("Film coefficient", "On this side's own surface.")] = None

    design_pressure: Annotated[float | None, _pressure("Design pressure")] = None
    test_pressure: Annotated[float | None, _pressure("Test pressure")] = None
    design_temperature: Annotated[float | None, _temperature("Design temperature", "120 degC")] = None
    minimum_temperature: Annotated[float | None, _temperature("Minimum design temperature", "-10 degC")] = None
    corrosion_allowance: Annotated[
        float | None, Stated("length", "Corrosion allowance", low=0.0, high=0.05, example="3 mm")
    ] = None
    nozzle_id: Annotated[float | None, length("Nozzle bore", "154 mm", 3.0)] = None
    nozzle_rho_v2: Annotated[float | None, _momentum("ρv² in the nozzle")] = None
    bundle_rho_v2: Annotated[float | None, _momentum("ρv² at the bundle entrance")] = None


class Sheet(Input):
    """A vendor's datasheet. Counts and the tube length are those of one shell."""

    item: Annotated[str | None, Words("Item", 60)] = None
    revision: Annotated[str | None, Words("Revision", 40)] = None
    date: Annotated[str | None, Words("Date", 40)] = None
    status: Annotated[str | None, Choice("Figures are", ("estimated", "guaranteed", "as built"))] = None
    guarantee: Annotated[str | None, Words("Guarantee", 300, help="For which fluid and within which tolerance.")] = None

    inside: SheetSide = SheetSide()
    outside: SheetSide = SheetSide()

    duty: Annotated[float | None, Stated("heat_flow", "Heat exchanged", above=0.0, high=1e11, example="1240 kW")] = None
    area: Annotated[
        float | None, _area("Surface", "Outside bare surface; of the unit unless the basis says shell.")
    ] = None
    area_per_shell: Annotated[float | None, _area("Surface of one shell")] = None
    area_kind: Annotated[
        str | None,
        Choice("Surface is", ("effective", "gross"), help="Between the tubesheets, or over the whole tube length."),
    ] = None
    basis: Annotated[
        str | None, Choice("Surface is that of", ("unit", "shell"), help="Of the whole unit or of one shell.")
    ] = None
    lmtd: Annotated[
        float | None,
        Stated("temperature_difference", "LMTD, counter-current", above=0.0, high=2000.0, example="31 K"),
    ] = None
    mtd: Annotated[
        float | None, Stated("temperature_difference", "MTD, corrected", above=0.0, high=2000.0, example="26 K")
    ] = None
    F: Annotated[
        float | None, Stated("dimensionless", "MTD correction factor F", above=0.0, high=10.0, example="0.85")
    ] = None
    U_service: Annotated[float | None, _coefficient("Transfer rate, service", "On the outside surface.")] = None
    U_dirty: Annotated[float | None, _coefficient("Transfer rate, dirty", "On the outside surface.")] = None
    U_clean: Annotated[float | None, _coefficient("Transfer rate, clean", "On the outside surface.")] = None
    excess_area: Annotated[float | None, Stated("fraction", "Excess area", low=-1.0, high=10.0, example="12 %")] = None
    wall_resistance: Annotated[float | None, _fouling("Resistance of the tube wall", "On the outside surface.")] = None

    tema: Annotated[str | None, Words("TEMA type", 3, help='Front head, shell and rear head, such as "AES".')] = None
    arrangement: Annotated[str | None, Choice("Arrangement", ("counter", "co-current"))] = None
    orientation: Annotated[str | None, Choice("Orientation", ("horizontal", "vertical"))] = None
    shells_in_series: Annotated[int | None, Count("Shells in series", 1, 24)] = None
    shells_in_parallel: Annotated[int | None, Count("Shells in parallel", 1, 24)] = None
    shell_id: Annotated[
        float | None, length("Shell inside diameter", "591 mm", 20.0, help="Of a double pipe: bore of the outer pipe.")
    ] = None
    tubes: Annotated[int | None, Count("Tubes", 1, 100000, help="Of one shell.")] = None
    tubes_are: Annotated[
        str | None,
        Choice("Tubes are counted as", ("tubes", "U-tubes"), help="Tubes: straight ones, or the legs of U-tubes."),
    ] = None
    tube_od: Annotated[float | None, length("Tube outside diameter", "19.05 mm", 5.0)] = None
    tube_id: Annotated[float | None, length("Tube inside diameter", "14.83 mm", 5.0)] = None
    tube_wall: Annotated[float | None, length("Tube wall", "2.11 mm", 0.5)] = None
    tube_wall_is: Annotated[str | None, Choice("Tube wall is", ("average", "minimum"))] = None
    gauge: Annotated[str | None, Words("Tube gauge", 12, help='Birmingham gauge of the wall, such as "14 BWG".')] = None
    tube_length: Annotated[
        float | None, length("Tube length", "4.88 m", 200.0, help="Straight length of one tube.")
    ] = None
    tubesheet_thickness: Annotated[float | None, length("Thickness of one tubesheet", "45 mm", 2.0)] = None
    tube_pitch: Annotated[float | None, length("Tube pitch", "25.4 mm", 2.0)] = None
    layout_angle: Annotated[str | None, Choice("Layout angle", ("30 deg", "45 deg", "60 deg", "90 deg"))] = None
    tube_passes: Annotated[int | None, Count("Tube passes", 1, 24)] = None
    material: Annotated[str | None, Words("Tube material", 60)] = None
    wall_conductivity: Annotated[float | None, _conductivity("Wall conductivity", "50 W/mK")] = None
    baffles: Annotated[int | None, Count("Baffles", 1, 1000, help="Of one shell.")] = None
    baffle_cut: Annotated[float | None, Stated("fraction", "Baffle cut", low=0.0, high=1.0, example="25 %")] = None
    baffle_cut_by: Annotated[str | None, Choice("Baffle cut by", ("diameter", "area"))] = None
    baffle_spacing: Annotated[float | None, length("Baffle spacing", "300 mm", 50.0)] = None
    inlet_spacing: Annotated[float | None, length("Inlet spacing", "400 mm", 50.0)] = None
    outlet_spacing: Annotated[float | None, length("Outlet spacing", "400 mm", 50.0)] = None
    bundle_diameter: Annotated[float | None, length("Bundle diameter", "540 mm", 20.0, help="Outer tube limit.")] = None
    sealing_strip_pairs: Annotated[int | None, Count("Pairs of sealing strips", 0, 50)] = None
    impingement_protection: Annotated[str | None, Choice("Impingement protection", ("yes", "no"))] = None
    expansion_joint: Annotated[str | None, Choice("Expansion joint", ("yes", "no"))] = None
    shell_cleaning: Annotated[str | None, Choice("Shell side is cleaned", ("mechanically", "chemically", "not"))] = None
    tube_corrosion_allowance: Annotated[
        float | None, Stated("length", "Corrosion allowance of the tubes", low=0.0, high=0.05, example="0 mm")
    ] = None
    weight_bundle: Annotated[float | None, _mass("Weight of the bundle")] = None
    weight_empty: Annotated[float | None, _mass("Weight, empty")] = None
    weight_full: Annotated[float | None, _mass("Weight, full of water")] = None

    inner_pipe: Pipe = Pipe()
    outer_pipe: Pipe = Pipe()
    leg_length: Annotated[float | None, length("Leg length", "6 m", 200.0, help="One straight leg of a hairpin.")] = (
        None
    )
    legs_in_series: Annotated[int | None, Count("Legs in series", 1, 400, help="Two a hairpin.")] = None
    banks_in_parallel: Annotated[int | None, Count("Banks in parallel", 1, 48)] = None

    @model_validator(mode="before")
    @classmethod
    def _dotted_keys(cls, given: Any) -> Any:
        """ "inside.T_out" at the top means T_out of the inside; a key given in both ways is left to be refused."""
        if not isinstance(given, dict):
            return given
        nested: dict[str, Any] = {key: value for key, value in given.items() if "." not in str(key)}
        for key, value in given.items():
            group, _, name = str(key).partition(".")
            if not name:
                continue
            at = nested.get(group, {})
            if group not in PARTED or not isinstance(at, dict) or name in at:
                nested[key] = value
            else:
                nested[group] = {**at, name: value}
        return nested

    def side(self, side: Side) -> SheetSide:
        return self.inside if side == "inside" else self.outside

    def stated(self) -> dict[str, Figure | int | str]:
        """What the sheet states, by path: figures in SI, counts, words."""
        return dict(_stated(self))


PARTED = (*SIDES, "inner_pipe", "outer_pipe")
"""Keys of a sheet that hold keys."""


def _stated(part: Input) -> Iterator[tuple[str, Any]]:
    for name in type(part).model_fields:
        value = getattr(part, name)
        if isinstance(value, Input):
            yield from ((f"{name}.{inner}", item) for inner, item in _stated(value))
        elif value is not None:
            yield name, value


def sheet_fields() -> Mapping[str, Declaration]:
    """Every field of a sheet by path, in the order of the form, with its declaration."""
    found: dict[str, Declaration] = {}
    own = Sheet.declared()
    for name, field in Sheet.model_fields.items():
        if name in own:
            found[name] = own[name]
        elif isinstance(field.annotation, type) and issubclass(field.annotation, Input):
            found |= {f"{name}.{inner}": item for inner, item in field.annotation.declared().items()}
    return found


__all__ = ["PARTED", "PARTS", "Sheet", "SheetSide", "sheet_fields"]
