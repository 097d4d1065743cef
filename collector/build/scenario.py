"""The scenario file's schema: every key with its unit, its bounds and its meaning."""

from __future__ import annotations

import math
from collections.abc import Iterable
from itertools import pairwise
from typing import Annotated, Literal

from pydantic import BeforeValidator, Field, PrivateAttr, WithJsonSchema, model_validator
from scipy.constants import zero_Celsius

from collector.build.catalogue import shelf
from collector.build.obstacles import RowsTable
from collector.build.surfaces import Surface
from collector.build.table import Table, fault, quantity
from collector.build.weather_table import ColumnsTable
from collector.physics.convection import WIND_RELATIONS
from collector.physics.fluids import freezing_point
from collector.physics.glazing import slab_from_normal
from weather.components import DECOMPOSITIONS
from weather.obstacles import Horizon
from weather.plane import MODELS as TILTED_SKY_MODELS
from weather.sky import MODELS as SKY_MODELS

__all__ = ["CHOICES", "COMPANIONS", "RIVALS", "AbsorberTable", "CasingTable", "CoverTable", "Scenario"]

CHOICES = {  # every step with a choice: its accepted names, each with its source; the schema's literals are held to them
    "wind": {name: relation.source for name, relation in WIND_RELATIONS.items()},
    "sky": SKY_MODELS,
    "tilted_sky": TILTED_SKY_MODELS,
    "longwave_view": {
        "tilted": "sky and ground each by its view factor; Liu & Jordan 1963, Solar Energy 7, 53",
        "sky": "the whole front faces the sky: an upper bound on the loss",
    },
    "absorptance_angle": {
        "constant": "the normal value at every angle",
        "flat-black": "falls with incidence; Beckman, Klein & Duffie 1977, in Duffie & Beckman, Eq. 4.11.1",
    },
    "diffuse": {
        "integrated": "covers and plate integrated over the sky's and the ground's part of the hemisphere",
        "effective-angle": "beam optics at one angle each; Brandemuehl & Beckman 1980, Solar Energy 24, 511",
    },
    "decomposition": DECOMPOSITIONS,
}
RIVALS: dict[str, tuple[tuple[str, ...], ...]] = {  # sets of keys of a table of which exactly one set is to be given
    "operation": (("inlet_C",), ("mean_C",)),
    "cover": (("refractive_index", "extinction_per_m", "thickness_mm"), ("transmittance", "reflectance"), ("glass",)),
    "coating": (("absorptance", "emittance"), ("coating",), ("reflectance_csv",), ("stack",)),
    "metal": (("conductivity_W_mK",), ("metal",)),
    "back": (("back_conductivity_W_mK",), ("back_insulation",)),
    "edge": (("edge_conductivity_W_mK",), ("edge_insulation",)),
    "wind": (("wind_factor",), ("wind_height_m",)),
    "incidence": (("b0",), ("incidence_deg", "K_beam")),
}
COMPANIONS = {"reflectance_csv": ("hemispherical",)}  # keys that mean nothing without another
MOST_COVERS = 3


class _Catalogued(Table):
    """A table of which some keys name what the catalogue holds."""

    def _named(self, key: str, *, kind: str) -> None:
        """Refuse a name that the catalogue does not hold."""
        name = getattr(self, key)
        if name is not None and name not in shelf(kind):
            raise fault("not in the catalogue", key=key, allowed=", ".join(map(repr, shelf(kind))), got=repr(name))


class PlaceTable(Table):
    """Where the collector stands."""

    weather: str = Field(min_length=1, description="a bundled station, or a weather file's path relative to this file")
    albedo: Annotated[float, Field(ge=0.0, le=1.0)] | Literal["file"] = Field(
        description="ground reflectance, or 'file' for the weather file's own column",
        json_schema_extra={"unit": "", "allowed": "0 to 1, or 'file'"},
    )
    latitude: float | None = quantity(
        -90.0, 90.0, "deg", doc="north positive; for weather files that carry none", default=None
    )
    longitude: float | None = quantity(-180.0, 180.0, "deg", doc="east positive", default=None)
    altitude_m: float | None = quantity(-450.0, 9000.0, "m", doc="above sea level", default=None)
    utc_offset_h: float | None = quantity(-12.0, 14.0, "h", doc="local standard time minus UTC", default=None)
    year: int | None = quantity(1800, 2200, "", doc="which calendar year, of a file with several", default=None)
    columns: ColumnsTable | None = Field(None, description="columns and units of a table in CSV in no known format")
    accept: list[str] = Field(default_factory=list, description="grave findings about the weather file to live with")


class MountingTable(Table):
    """How it stands, and in which wind."""

    tilt_deg: float = quantity(0.0, 90.0, "deg", doc="from the horizontal")
    azimuth_deg: float = quantity(0.0, 360.0, "deg", doc="of the plane's normal, clockwise from north")
    wind_factor: float | None = quantity(
        0.0, 2.0, "", doc="wind at the collector over the file's; 1 if absent", default=None
    )
    wind_height_m: float | None = quantity(
        0.5, 200.0, "m", doc="or: brings the file's 10 m wind to this height", default=None
    )
    building_length_m: float | None = quantity(
        2.0, 200.0, "m", doc="cube root of the building's volume, for the wind relation 'mitchell'", default=None
    )
    horizon_csv: str | None = Field(
        None, min_length=1, description="skyline: azimuth_deg, elevation_deg in CSV, relative to this file"
    )
    rows: RowsTable | None = Field(None, description="rows of collectors in front of each other")
    _horizon: Horizon | None = PrivateAttr(default=None)

    @property
    def horizon(self) -> Horizon | None:
        """What the file of ``horizon_csv`` holds, once it is read."""
        return self._horizon

    def with_horizon(self, horizon: Horizon) -> MountingTable:
        """Return the same table with its file's content."""
        table = self.model_copy()
        table._horizon = horizon
        return table

    @model_validator(mode="after")
    def _check(self) -> MountingTable:
        self._one_of(RIVALS["wind"], optional=True)
        if self.rows is not None and (wrong := self.rows.fault_at(self.tilt_deg)):
            raise wrong
        return self


class CoverTable(_Catalogued):
    """One cover, outermost first, and the gap beneath it."""

    refractive_index: float | None = quantity(1.0, 3.0, "", doc="of the cover's material", default=None)
    extinction_per_m: float | None = quantity(0.0, 1000.0, "1/m", doc="extinction coefficient", default=None)
    thickness_mm: float | None = quantity(0.01, 30.0, "mm", doc="of the cover", default=None)
    transmittance: float | None = quantity(0.05, 1.0, "", doc="or: solar, normal, of the whole cover", default=None)
    reflectance: float | None = quantity(0.0, 0.5, "", doc="solar, normal, of the whole cover", default=None)
    glass: str | None = Field(None, description="or: a cover of the catalogue")
    emittance: float | None = quantity(
        0.01, 1.0, "", doc="long wave, either face; the catalogue's if a glass is named", default=None
    )
    gap_mm: float = quantity(1.0, 200.0, "mm", doc="gas layer beneath this cover")
    heat_capacity_kJ_m2K: float | None = quantity(
        0.05, 100.0, "kJ/m2K", doc="of the cover; the glass's own", default=None
    )

    @model_validator(mode="after")
    def _check(self) -> CoverTable:
        self._one_of(RIVALS["cover"])
        self._named("glass", kind="covers")
        if self.emittance is None and self.glass is None:
            raise fault("required key missing", key="emittance", allowed="0.01 to 1")
        if self.transmittance is not None and self.reflectance is not None:
            self._check_slab(self.transmittance, self.reflectance)
        return self

    def _check_slab(self, transmittance: float, reflectance: float) -> None:
        try:
            slab_from_normal(transmittance=transmittance, reflectance=reflectance)
        except ValueError as reason:
            got = f"{transmittance:g} with reflectance {reflectance:g}"
            raise fault(f"{reason}", key="transmittance", allowed="together at most 1", got=got) from None


_Files = Annotated[
    list[Annotated[str, Field(min_length=1)]],
    Field(min_length=1, max_length=10),
    BeforeValidator(lambda given: given if isinstance(given, list) else [given]),
    WithJsonSchema({"anyOf": [{"type": "string"}, {"type": "array", "items": {"type": "string"}}]}),
]


class AbsorberTable(_Catalogued):
    """Plate, coating and tubes."""

    absorptance: float | None = quantity(0.05, 1.0, "", doc="solar, normal", default=None)
    emittance: float | None = quantity(0.01, 1.0, "", doc="thermal, hemispherical", default=None)
    coating: str | None = Field(None, description="or: a coating of the catalogue")
    reflectance_csv: _Files | None = Field(
        None,
        description="or: measured reflectance over wavelength, relative to this file; one file or a list to be joined",
        json_schema_extra={"unit": "", "allowed": "the path of a CSV file, or a list of such paths"},
    )
    stack: str | None = Field(None, min_length=1, description="or: a coating layer by layer, a TOML file's path")
    hemispherical: Literal["metal"] | None = Field(
        None,
        description="takes a measured spectrum's emittance from normal to hemispherical, as a metal's",
        json_schema_extra={"allowed": "'metal'"},
    )
    conductivity_W_mK: float | None = quantity(0.1, 500.0, "W/mK", doc="of the plate", default=None)
    metal: str | None = Field(None, description="or: a plate material of the catalogue")
    heat_capacity_kJ_m3K: float | None = quantity(
        100.0, 5e3, "kJ/m3K", doc="of plate and tubes; the metal's own", default=None
    )
    thickness_mm: float = quantity(0.05, 20.0, "mm", doc="of the plate")
    tube_pitch_mm: float = quantity(3.0, 1000.0, "mm", doc="from tube to tube")
    tube_outer_mm: float = quantity(2.0, 100.0, "mm", doc="outer diameter")
    tube_inner_mm: float = quantity(1.0, 100.0, "mm", doc="inner diameter")
    bond_W_mK: float | None = quantity(0.1, 1e5, "W/mK", doc="bond conductance; a perfect bond if absent", default=None)
    _surface: Surface | None = PrivateAttr(default=None)

    @property
    def surface(self) -> Surface | None:
        """What the files of ``reflectance_csv`` or ``stack`` hold, once they are read."""
        return self._surface

    def with_surface(self, surface: Surface) -> AbsorberTable:
        """Return the same table with its files' content."""
        table = self.model_copy()
        table._surface = surface
        return table

    @model_validator(mode="after")
    def _check(self) -> AbsorberTable:
        self._one_of(RIVALS["coating"])
        self._one_of(RIVALS["metal"])
        self._named("coating", kind="coatings")
        self._named("metal", kind="metals")
        if self.hemispherical is not None and self.reflectance_csv is None:
            raise fault("corrects a measured spectrum only", key="hemispherical", allowed="with reflectance_csv")
        if self.tube_inner_mm >= self.tube_outer_mm:
            got, allowed = f"{self.tube_inner_mm:g} mm", f"below tube_outer_mm, {self.tube_outer_mm:g} mm"
            raise fault("tube without a wall", key="tube_inner_mm", allowed=allowed, got=got)
        if self.tube_outer_mm > self.tube_pitch_mm:
            got, allowed = f"{self.tube_outer_mm:g} mm", f"at most tube_pitch_mm, {self.tube_pitch_mm:g} mm"
            raise fault("tubes overlap", key="tube_outer_mm", allowed=allowed, got=got)
        return self


class CasingTable(_Catalogued):
    """Insulation behind the plate and around its edges."""

    back_thickness_mm: float = quantity(1.0, 500.0, "mm", doc="behind the plate")
    back_conductivity_W_mK: float | None = quantity(0.005, 5.0, "W/mK", doc="of it", default=None)
    back_insulation: str | None = Field(None, description="or: an insulation of the catalogue")
    back_heat_capacity_kJ_m3K: float | None = quantity(1.0, 5e3, "kJ/m3K", doc="the insulation's own", default=None)
    edge_thickness_mm: float = quantity(1.0, 500.0, "mm", doc="around the edges")
    edge_conductivity_W_mK: float | None = quantity(0.005, 5.0, "W/mK", doc="of it", default=None)
    edge_insulation: str | None = Field(None, description="or: an insulation of the catalogue")
    edge_heat_capacity_kJ_m3K: float | None = quantity(1.0, 5e3, "kJ/m3K", doc="the insulation's own", default=None)
    edge_height_mm: float = quantity(0.0, 500.0, "mm", doc="of the edge that loses heat; 0 for none")

    @model_validator(mode="after")
    def _check(self) -> CasingTable:
        self._one_of(RIVALS["back"])
        self._one_of(RIVALS["edge"])
        self._named("back_insulation", kind="insulation")
        self._named("edge_insulation", kind="insulation")
        return self


class ReportTable(Table):
    """A collector known by its test report: coefficients of ISO 9806:2017, between mean fluid and air temperature."""

    eta0: float = quantity(0.05, 1.0, "", doc="peak efficiency for beam at normal incidence")
    a1_W_m2K: float = quantity(0.0, 60.0, "W/m2K", doc="heat loss coefficient")
    a2_W_m2K2: float = quantity(0.0, 1.0, "W/m2K2", doc="its rise with temperature", default=0.0)
    a3_J_m3K: float = quantity(0.0, 20.0, "J/m3K", doc="heat loss's dependence on wind", default=0.0)
    a4: float = quantity(0.0, 1.5, "", doc="dependence on long wave", default=0.0)
    a5_kJ_m2K: float | None = quantity(
        0.1, 200.0, "kJ/m2K", doc="effective heat capacity; not counted if absent", default=None
    )
    a6_s_m: float = quantity(0.0, 0.2, "s/m", doc="peak efficiency's dependence on wind", default=0.0)
    a7_J_m3K4: float = quantity(-1.0, 1.0, "", doc="long wave's dependence on wind", default=0.0)
    a8_W_m2K4: float = quantity(0.0, 1e-4, "W/m2K4", doc="radiation loss", default=0.0)
    b0: float | None = quantity(0.0, 0.6, "", doc="beam incidence modifier 1 - b0 (1/cos - 1)", default=None)
    incidence_deg: list[Annotated[float, Field(ge=0.0, le=90.0)]] | None = Field(
        None, description="or: angles of the beam incidence modifier, rising", json_schema_extra={"unit": "deg"}
    )
    K_beam: list[Annotated[float, Field(ge=0.0, le=1.5)]] | None = Field(
        None, description="modifier at those angles", json_schema_extra={"unit": ""}
    )
    K_diffuse: float | None = quantity(
        0.1, 1.2, "", doc="diffuse modifier; integrated from the beam's if absent", default=None
    )
    area_m2: float = quantity(0.01, 1000.0, "m2", doc="of a module, that the coefficients refer to")
    tested_to_K: float | None = quantity(5.0, 400.0, "K", doc="highest mean fluid above air in the test", default=None)

    @model_validator(mode="after")
    def _check(self) -> ReportTable:
        if self.a1_W_m2K <= 3.0 * self.a3_J_m3K:
            got, allowed = f"{self.a1_W_m2K:g} W/m2K", f"above 3 a3, {3.0 * self.a3_J_m3K:g} W/m2K"
            raise fault("in calm air the loss would vanish", key="a1_W_m2K", allowed=allowed, got=got)
        self._one_of(RIVALS["incidence"])
        angles, values = self.incidence_deg, self.K_beam
        if angles is not None and values is not None:
            if len(angles) != len(values) or len(angles) < 2:
                got, allowed = f"{len(angles)} angles, {len(values)} values", "as many values as angles, at least two"
                raise fault("does not fit incidence_deg", key="K_beam", allowed=allowed, got=got)
            if any(later <= earlier for earlier, later in pairwise(angles)):
                raise fault("angles must rise", key="incidence_deg", allowed="rising from 0", got=str(angles))
        return self


class CollectorTable(Table):
    """The module and how many of it."""

    modules: int = quantity(1, 100_000, "", doc="how many")
    length_m: float = quantity(0.1, 30.0, "m", doc="along the tubes")
    width_m: float = quantity(0.05, 30.0, "m", doc="across the tubes")
    capacity_kJ_m2K: float | None = quantity(
        0.5,
        200.0,
        "kJ/m2K",
        doc="heat held per kelvin of the plate; from the materials if absent and all are known",
        default=None,
    )
    gross_area_m2: float | None = quantity(
        0.01, 1000.0, "m2", doc="of a module, where results per gross area are wanted", default=None
    )
    cover: list[CoverTable] = Field(
        default_factory=list, max_length=MOST_COVERS, description="outermost first; none is an unglazed collector"
    )
    absorber: AbsorberTable | None = Field(None, description="plate, coating and tubes")
    casing: CasingTable | None = Field(None, description="insulation")
    tested: ReportTable | None = Field(
        None, description="or: the coefficients of a test report, in place of all of these"
    )

    @model_validator(mode="after")
    def _check(self) -> CollectorTable:
        self._check_kind()
        area = self.length_m * self.width_m
        if self.gross_area_m2 is not None and self.gross_area_m2 < area:
            got, allowed = f"{self.gross_area_m2:g} m2", f"at least length x width, {area:g} m2"
            raise fault("gross area smaller than the collector", key="gross_area_m2", allowed=allowed, got=got)
        if self.absorber is not None and self.absorber.tube_pitch_mm > self.width_m * 1e3:
            got, allowed = f"{self.absorber.tube_pitch_mm:g} mm", f"at most width_m, {self.width_m * 1e3:g} mm"
            raise fault("not one tube in the width", key="absorber.tube_pitch_mm", allowed=allowed, got=got)
        return self

    def _check_kind(self) -> None:
        """A build sheet or a test report, and not both."""
        given = [key for key in ("absorber", "casing") if getattr(self, key) is not None] + (
            ["cover"] if self.cover else []
        )
        if self.tested is not None and (given or self.capacity_kJ_m2K is not None):
            got = ", ".join(["tested", *given, *(["capacity_kJ_m2K"] if self.capacity_kJ_m2K is not None else [])])
            allowed = "a test report, or cover, absorber and casing"
            raise fault("keys that exclude each other", key="tested", allowed=allowed, got=got)
        for key in ("absorber", "casing"):
            if self.tested is None and key not in given:
                raise fault(
                    "required key missing",
                    key=key,
                    allowed="[collector.absorber] and [collector.casing], or [collector.tested]",
                )


class FluidTable(Table):
    """What flows, and how much."""

    name: Literal["water", "propylene glycol", "ethylene glycol"] = Field(description="heat carrier")
    mass_fraction: float = quantity(0.0, 0.6, "", doc="of glycol in water", default=0.0)
    flow_kg_s_m2: float = quantity(0.0005, 0.5, "kg/s m2", doc="per m2 of length x width")

    @model_validator(mode="after")
    def _check(self) -> FluidTable:
        if (self.name == "water") != (self.mass_fraction == 0.0):
            allowed = "0 for water" if self.name == "water" else f"above 0 for {self.name}"
            raise fault(
                "mass fraction does not fit the fluid",
                key="mass_fraction",
                allowed=allowed,
                got=f"{self.mass_fraction:g}",
            )
        return self

    @property
    def coldest_C(self) -> float:  # noqa: N802 # the unit's symbol
        """Temperature at which it begins to freeze, to a tenth on the warm side."""
        freezing = freezing_point(self.name, mass_fraction=self.mass_fraction) - zero_Celsius
        return math.ceil(round(10.0 * freezing, 6)) / 10.0 + 0.0


_Temperature = Annotated[float, Field(ge=-50.0, le=200.0)]
_Temperatures = Annotated[
    list[_Temperature],
    Field(min_length=1, max_length=50),
    BeforeValidator(lambda given: given if isinstance(given, list) else [given]),
    WithJsonSchema({"anyOf": [{"type": "number"}, {"type": "array", "items": {"type": "number"}}]}),
]


class OperationTable(Table):
    """The temperature that the load needs."""

    inlet_C: float | None = quantity(-50.0, 200.0, "C", doc="fluid temperature held at the inlet", default=None)
    mean_C: _Temperatures | None = Field(
        None,
        description="or: mean fluid temperature, one or a list",
        json_schema_extra={"unit": "C", "allowed": "a number or a list of numbers, each -50 to 200 C"},
    )

    start_K: float | None = quantity(
        0.0, 50.0, "K", doc="plate above the fluid held at which the pump starts", default=None
    )
    stop_K: float | None = quantity(
        0.0, 50.0, "K", doc="plate above the fluid held at which the pump stops", default=None
    )

    @model_validator(mode="after")
    def _check(self) -> OperationTable:
        self._one_of(RIVALS["operation"])
        if (self.stop_K or 0.0) > (self.start_K or 0.0):
            got, allowed = f"{self.stop_K:g} K", f"at most start_K, {self.start_K or 0.0:g} K"
            raise fault("the pump would stop before it starts", key="stop_K", allowed=allowed, got=got)
        return self


class ModelsTable(Table):
    """Which published relation stands for each step; `noonplate models` lists them with their sources."""

    wind: Literal["watmuff", "mcadams", "mitchell", "jayamaha"] = Field(
        default="watmuff", description="wind coefficient"
    )
    sky: Literal["berdahl-martin", "martin-berdahl", "brunt", "swinbank", "measured", "ambient"] = Field(
        default="berdahl-martin", description="sky temperature"
    )
    sky_pressure_term: bool = Field(default=False, description="altitude term of the Berdahl-Martin clear sky")
    tilted_sky: Literal["perez-driesse", "perez", "hay-davies", "isotropic"] = Field(
        default="perez-driesse", description="diffuse on the plane"
    )
    longwave_view: Literal["tilted", "sky"] = Field(default="tilted", description="what the front radiates to")
    absorptance_angle: Literal["constant", "flat-black"] = Field(
        default="constant", description="absorptance over incidence"
    )
    diffuse: Literal["integrated", "effective-angle"] = Field(
        default="integrated", description="optics of diffuse light"
    )
    decomposition: Literal["erbs", "disc", "boland"] = Field(
        default="erbs", description="direct and diffuse, where the weather file has global irradiance alone"
    )


class Scenario(Table):
    """One collector at one place, run at one temperature or several."""

    title: str = Field(min_length=1, max_length=200, description="stands over every table and figure")
    place: PlaceTable
    mounting: MountingTable
    collector: CollectorTable
    fluid: FluidTable
    operation: OperationTable
    models: ModelsTable = ModelsTable()

    def accepting(self, names: Iterable[str]) -> Scenario:
        """Return the same, living with further grave findings about the weather file."""
        place = self.place.model_copy(update={"accept": [*self.place.accept, *names]})
        return self.model_copy(update={"place": place})

    @model_validator(mode="after")
    def _check(self) -> Scenario:
        if self.models.wind == "mitchell" and self.mounting.building_length_m is None:
            allowed = "the cube root of the building's volume in m"
            raise fault(
                "required key missing: models.wind = 'mitchell' needs it",
                key="mounting.building_length_m",
                allowed=allowed,
            )
        key = "inlet_C" if self.operation.inlet_C is not None else "mean_C"
        coldest = self.operation.inlet_C if self.operation.inlet_C is not None else min(self.operation.mean_C or [0.0])
        if coldest < self.fluid.coldest_C:
            got, allowed = (
                f"{coldest:g} C",
                f"at least {self.fluid.coldest_C:.1f} C, where {self.fluid.name} begins to freeze",
            )
            raise fault("the fluid is frozen", key=f"operation.{key}", allowed=allowed, got=got)
        return self
