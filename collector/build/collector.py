"""A collector in SI units: what a scenario describes, resolved and converted once."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Any

import numpy as np

from collector.build.catalogue import entry
from collector.build.scenario import AbsorberTable, CasingTable, CollectorTable, CoverTable, ReportTable, Scenario
from collector.build.surfaces import REFERENCE, Surface
from collector.physics.emittance_curve import EmittanceCurve
from collector.physics.glazing import slab_from_normal
from weather.errors import InputError, Problem

__all__ = ["Absorber", "Collector", "Cover", "Materials", "ReportedCollector", "collector_of", "values_of"]


@dataclass(frozen=True, kw_only=True)
class Cover:
    """One cover and the gap beneath it.

    Parameters
    ----------
    refractive_index
        Of the slab.
    absorption
        Extinction coefficient times thickness.
    emittance
        Long wave, of either face.
    gap
        Gas layer beneath [m].
    """

    refractive_index: float
    absorption: float
    emittance: float
    gap: float


@dataclass(frozen=True, kw_only=True)
class Absorber:
    """Plate, coating and tubes.

    Parameters
    ----------
    absorptance, emittance
        Solar at normal incidence; thermal, at 100 C where it depends on the temperature.
    conductivity, thickness
        Of the plate [W/mK, m].
    pitch, outer, inner
        Distance between tubes and their diameters [m].
    bond_resistance
        Per length of tube; 0 is a perfect bond [mK/W].
    radiating
        Emittance over the plate's temperature; None of one emittance for all.
    """

    absorptance: float
    emittance: float
    conductivity: float
    thickness: float
    pitch: float
    outer: float
    inner: float
    bond_resistance: float
    radiating: EmittanceCurve | None = None


@dataclass(frozen=True, kw_only=True)
class Materials:
    """Heat capacities, None where not known.

    Parameters
    ----------
    plate
        Of plate and tubes [J/m3K].
    covers
        Of each cover, outermost first [J/m2K].
    back, edge
        Of the insulation, per area of length x width [J/m2K].
    """

    plate: float | None = None
    covers: tuple[float | None, ...] = ()
    back: float | None = None
    edge: float | None = None


@dataclass(frozen=True, kw_only=True)
class Collector:
    """One module as built, mounted and fed, with the choices that belong to it.

    Parameters
    ----------
    covers
        Outermost first; none is an unglazed plate.
    absorber
        The plate with its tubes.
    u_back, u_edge
        Losses of the casing per area of length x width [W/m2K].
    length, width
        Along and across the tubes [m].
    tilt_deg
        From the horizontal [deg].
    fluid, mass_fraction, flow
        In the tubes; flow per area of length x width [kg/s m2].
    falling_absorptance
        Whether the absorptance falls with the angle of incidence like flat black.
    integrated_diffuse
        Whether diffuse light is integrated over the hemisphere, or taken at effective angles.
    whole_sky
        Whether the front radiates to the sky alone.
    capacity
        Heat held per kelvin, as given; None leaves it to the materials [J/m2K].
    materials
        What is known of them.
    sky_open
        Share of the sky's view that obstacles leave open.
    """

    covers: tuple[Cover, ...]
    absorber: Absorber
    u_back: float
    u_edge: float
    length: float
    width: float
    tilt_deg: float
    fluid: str
    mass_fraction: float
    flow: float
    falling_absorptance: bool
    integrated_diffuse: bool
    whole_sky: bool
    capacity: float | None = None
    materials: Materials = Materials()
    sky_open: float = 1.0

    @property
    def area(self) -> float:
        """Length x width [m2]."""
        return self.length * self.width


@dataclass(frozen=True, kw_only=True)
class ReportedCollector:
    """A collector known by its test report, everything per area of length x width.

    Parameters
    ----------
    eta0, a1, a2, a3, a4, a6, a7, a8
        Coefficients of ISO 9806:2017 in SI units.
    capacity
        The report's a5; None where it has none [J/m2K].
    beam_angles_deg, beam_modifiers
        Beam incidence modifier, linear between the angles.
    diffuse_modifier
        Of sky and ground light; None integrates the beam's.
    tested_to
        Highest mean fluid above air in the test; None if not told [K].
    length, width, tilt_deg, fluid, mass_fraction, flow, whole_sky, sky_open
        As for ``Collector``.
    """

    eta0: float
    a1: float
    a2: float
    a3: float
    a4: float
    a6: float
    a7: float
    a8: float
    capacity: float | None
    beam_angles_deg: tuple[float, ...]
    beam_modifiers: tuple[float, ...]
    diffuse_modifier: float | None
    tested_to: float | None
    length: float
    width: float
    tilt_deg: float
    fluid: str
    mass_fraction: float
    flow: float
    whole_sky: bool
    sky_open: float = 1.0

    @property
    def area(self) -> float:
        """Length x width [m2]."""
        return self.length * self.width


def collector_of(scenario: Scenario) -> Collector | ReportedCollector:
    """Collector that a scenario describes, by its build or by its test report.

    Parameters
    ----------
    scenario
        Checked.

    Returns
    -------
    Collector or ReportedCollector
        In SI units, catalogue names resolved.
    """
    table, models = scenario.collector, scenario.models
    if table.tested is not None:
        return _tested(scenario, table.tested)
    assert table.casing is not None  # noqa: S101 # the scenario's check saw to it
    assert table.absorber is not None  # noqa: S101 # likewise
    u_back, u_edge = _casing(table.casing, length=table.length_m, width=table.width_m)
    return Collector(
        covers=tuple(_cover(cover) for cover in table.cover),
        absorber=_absorber(table.absorber),
        u_back=u_back,
        u_edge=u_edge,
        length=table.length_m,
        width=table.width_m,
        tilt_deg=scenario.mounting.tilt_deg,
        fluid=scenario.fluid.name,
        mass_fraction=scenario.fluid.mass_fraction,
        flow=scenario.fluid.flow_kg_s_m2,
        falling_absorptance=models.absorptance_angle == "flat-black",
        integrated_diffuse=models.diffuse == "integrated",
        whole_sky=models.longwave_view == "sky",
        capacity=None if table.capacity_kJ_m2K is None else 1e3 * table.capacity_kJ_m2K,
        materials=_materials(table, table.absorber, table.casing),
    )


def _tested(scenario: Scenario, report: ReportTable) -> ReportedCollector:
    table = scenario.collector
    per_area = report.area_m2 / (table.length_m * table.width_m)
    angles, modifiers = _beam_modifier(report)
    return ReportedCollector(
        eta0=report.eta0 * per_area,
        a1=report.a1_W_m2K * per_area,
        a2=report.a2_W_m2K2 * per_area,
        a3=report.a3_J_m3K * per_area,
        a4=report.a4 * per_area,
        a6=report.a6_s_m * per_area,
        a7=report.a7_J_m3K4 * per_area,
        a8=report.a8_W_m2K4 * per_area,
        capacity=None if report.a5_kJ_m2K is None else 1e3 * report.a5_kJ_m2K * per_area,
        beam_angles_deg=angles,
        beam_modifiers=modifiers,
        diffuse_modifier=report.K_diffuse,
        tested_to=report.tested_to_K,
        length=table.length_m,
        width=table.width_m,
        tilt_deg=scenario.mounting.tilt_deg,
        fluid=scenario.fluid.name,
        mass_fraction=scenario.fluid.mass_fraction,
        flow=scenario.fluid.flow_kg_s_m2,
        whole_sky=scenario.models.longwave_view == "sky",
    )


def _beam_modifier(report: ReportTable) -> tuple[tuple[float, ...], tuple[float, ...]]:
    """The modifier as a table to 90 degrees; from b0 it never falls below 0 (Souka & Safwat 1966, as in ASHRAE 93)."""
    if report.incidence_deg is not None and report.K_beam is not None:
        ends = () if report.incidence_deg[-1] == 90.0 else (90.0,)
        return (*report.incidence_deg, *ends), (*report.K_beam, *(0.0 for _ in ends))
    angles = tuple(float(angle) for angle in range(90))
    slope = report.b0 or 0.0
    values = (max(1.0 - slope * (1.0 / math.cos(math.radians(angle)) - 1.0), 0.0) for angle in angles)
    return (*angles, 90.0), (*values, 0.0)


def _cover(table: CoverTable) -> Cover:
    given = table.model_dump(exclude_none=True)
    values = (entry("covers", name=table.glass) if table.glass else {}) | given
    if "transmittance" in values:
        index, absorption = slab_from_normal(transmittance=values["transmittance"], reflectance=values["reflectance"])
    else:
        index, absorption = values["refractive_index"], values["extinction_per_m"] * values["thickness_mm"] / 1e3
    return Cover(refractive_index=index, absorption=absorption, emittance=values["emittance"], gap=table.gap_mm / 1e3)


def _absorber(table: AbsorberTable) -> Absorber:
    coating, radiating = _coating(table)
    metal = entry("metals", name=table.metal) if table.metal else table.model_dump()
    return Absorber(
        absorptance=coating["absorptance"],
        emittance=coating["emittance"],
        conductivity=metal["conductivity_W_mK"],
        thickness=table.thickness_mm / 1e3,
        pitch=table.tube_pitch_mm / 1e3,
        outer=table.tube_outer_mm / 1e3,
        inner=table.tube_inner_mm / 1e3,
        bond_resistance=1.0 / table.bond_W_mK if table.bond_W_mK else 0.0,
        radiating=radiating,
    )


def _coating(table: AbsorberTable) -> tuple[dict[str, Any], EmittanceCurve | None]:
    """Absorptance and emittance, and the emittance over temperature where the scenario names spectra."""
    if table.coating:
        return entry("coatings", name=table.coating), None
    if not table.reflectance_csv and not table.stack:
        return table.model_dump(), None
    if table.surface is None:
        what, do = "its spectrum has not been read", "read the scenario from its file"
        raise InputError(Problem(where="collector.absorber", what=what, do=do))
    return values_of(table.surface), table.surface.radiating


def values_of(surface: Surface) -> dict[str, float]:
    """Absorptance, and the emittance at 100 C that stands for the whole curve where one number is wanted.

    Parameters
    ----------
    surface
        Read.

    Returns
    -------
    dict
        Keys as in the scenario file.
    """
    eps, _ = surface.radiating(np.array([REFERENCE]))
    return {"absorptance": surface.absorptance, "emittance": float(eps[0])}


def _casing(table: CasingTable, *, length: float, width: float) -> tuple[float, float]:
    """Back and edge loss per area of length x width; Duffie & Beckman, Eq. 6.4.10-6.4.11."""
    back = _conductivity(table.back_conductivity_W_mK, table.back_insulation) / (table.back_thickness_mm / 1e3)
    edge = _conductivity(table.edge_conductivity_W_mK, table.edge_insulation) / (table.edge_thickness_mm / 1e3)
    rim = 2.0 * (length + width) * table.edge_height_mm / 1e3
    return back, edge * rim / (length * width)


def _materials(table: CollectorTable, absorber: AbsorberTable, casing: CasingTable) -> Materials:
    rim = 2.0 * (table.length_m + table.width_m) * casing.edge_height_mm / 1e3 / (table.length_m * table.width_m)
    plate = _heat(absorber.heat_capacity_kJ_m3K, "metals", absorber.metal, key="heat_capacity_kJ_m3K")
    back = _heat(casing.back_heat_capacity_kJ_m3K, "insulation", casing.back_insulation, key="heat_capacity_kJ_m3K")
    edge = _heat(casing.edge_heat_capacity_kJ_m3K, "insulation", casing.edge_insulation, key="heat_capacity_kJ_m3K")
    return Materials(
        plate=plate,
        covers=tuple(
            _heat(cover.heat_capacity_kJ_m2K, "covers", cover.glass, key="heat_capacity_kJ_m2K")
            for cover in table.cover
        ),
        back=None if back is None else back * casing.back_thickness_mm / 1e3,
        edge=0.0 if rim == 0.0 else None if edge is None else edge * rim * casing.edge_thickness_mm / 1e3,
    )


def _heat(given: float | None, shelf: str, name: str | None, *, key: str) -> float | None:
    """Heat capacity as given, or the catalogue's, per J instead of kJ."""
    value = given if given is not None else entry(shelf, name=name)[key] if name else None
    return None if value is None else 1e3 * float(value)


def _conductivity(given: float | None, name: str | None) -> float:
    value = entry("insulation", name=name)["conductivity_W_mK"] if name else given
    return float(value)  # type: ignore[arg-type] # one of the two is there: the scenario's check saw to it
