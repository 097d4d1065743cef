"""A collector in SI units: what a scenario describes, resolved and converted once."""

from __future__ import annotations

from dataclasses import dataclass

from collector.build.catalogue import entry
from collector.build.scenario import AbsorberTable, CasingTable, CollectorTable, CoverTable, Scenario
from collector.physics.glazing import slab_from_normal

__all__ = ["Absorber", "Collector", "Cover", "Materials", "collector_of"]


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
        Solar at normal incidence; thermal.
    conductivity, thickness
        Of the plate [W/mK, m].
    pitch, outer, inner
        Distance between tubes and their diameters [m].
    bond_resistance
        Per length of tube; 0 is a perfect bond [mK/W].
    """

    absorptance: float
    emittance: float
    conductivity: float
    thickness: float
    pitch: float
    outer: float
    inner: float
    bond_resistance: float


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

    @property
    def area(self) -> float:
        """Length x width [m2]."""
        return self.length * self.width


def collector_of(scenario: Scenario) -> Collector:
    """Collector that a scenario describes.

    Parameters
    ----------
    scenario
        Checked.

    Returns
    -------
    Collector
        In SI units, catalogue names resolved.
    """
    table, models = scenario.collector, scenario.models
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
        materials=_materials(table),
    )


def _cover(table: CoverTable) -> Cover:
    given = table.model_dump(exclude_none=True)
    values = (entry("covers", name=table.glass) if table.glass else {}) | given
    if "transmittance" in values:
        index, absorption = slab_from_normal(transmittance=values["transmittance"], reflectance=values["reflectance"])
    else:
        index, absorption = values["refractive_index"], values["extinction_per_m"] * values["thickness_mm"] / 1e3
    return Cover(refractive_index=index, absorption=absorption, emittance=values["emittance"], gap=table.gap_mm / 1e3)


def _absorber(table: AbsorberTable) -> Absorber:
    coating = entry("coatings", name=table.coating) if table.coating else table.model_dump()
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
    )


def _casing(table: CasingTable, *, length: float, width: float) -> tuple[float, float]:
    """Back and edge loss per area of length x width; Duffie & Beckman, Eq. 6.4.10-6.4.11."""
    back = _conductivity(table.back_conductivity_W_mK, table.back_insulation) / (table.back_thickness_mm / 1e3)
    edge = _conductivity(table.edge_conductivity_W_mK, table.edge_insulation) / (table.edge_thickness_mm / 1e3)
    rim = 2.0 * (length + width) * table.edge_height_mm / 1e3
    return back, edge * rim / (length * width)


def _materials(table: CollectorTable) -> Materials:
    absorber, casing = table.absorber, table.casing
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
