"""The file of a climate known by twelve monthly means: its schema, and every fault in it with its line."""

from __future__ import annotations

from pathlib import Path
from typing import Annotated, Any

import numpy as np
from pydantic import Field
from scipy.constants import zero_Celsius

from collector.build.table import Table, quantity, read_table
from weather.climate import BOUNDS, Climate, climate_problems, frame_of
from weather.errors import InputError
from weather.year import Floats, Site

__all__ = ["ClimateFile", "read_climate"]


def _within(key: str) -> Any:
    low, high, _ = BOUNDS[key]
    return Field(ge=low, le=high)


def _twelve(key: str, *, doc: str, default: Any = ...) -> Any:
    low, high, unit = BOUNDS[key]
    allowed = f"twelve numbers, January to December, {low:g} to {high:g} {unit}"
    return Field(
        default,
        min_length=12,
        max_length=12,
        description=doc,
        json_schema_extra={"unit": unit, "allowed": allowed},
    )


class ClimatePlaceTable(Table):
    """Where the climate is."""

    name: str = Field(
        min_length=1, max_length=80, description="what the place is called", json_schema_extra={"allowed": "text"}
    )
    latitude: float = quantity(-90.0, 90.0, "deg", doc="north positive")
    longitude: float = quantity(-180.0, 180.0, "deg", doc="east positive")
    altitude_m: float = quantity(-450.0, 9000.0, "m", doc="above sea level")
    utc_offset_h: float = quantity(-12.0, 14.0, "h", doc="local standard time minus UTC")


class MonthsTable(Table):
    """Means of the twelve months, January first."""

    ghi_kWh_m2: list[Annotated[float, _within("ghi_kWh_m2")]] = _twelve(  # noqa: N815 # the unit's symbol
        "ghi_kWh_m2", doc="global horizontal irradiation, mean of a day"
    )
    air_C: list[Annotated[float, _within("air_C")]] = _twelve("air_C", doc="air temperature")  # noqa: N815
    range_K: list[Annotated[float, _within("range_K")]] | None = _twelve(  # noqa: N815
        "range_K", doc="daily maximum less daily minimum temperature", default=None
    )
    daily_K: list[Annotated[float, _within("daily_K")]] | None = _twelve(  # noqa: N815
        "daily_K", doc="standard deviation of the daily mean temperature from day to day", default=None
    )
    humidity_percent: list[Annotated[float, _within("humidity_percent")]] | None = _twelve(
        "humidity_percent", doc="relative humidity", default=None
    )
    wind_m_s: list[Annotated[float, _within("wind_m_s")]] | None = _twelve(
        "wind_m_s", doc="wind speed at 10 m", default=None
    )


class ClimateFile(Table):
    """A place and its monthly means."""

    place: ClimatePlaceTable = Field(
        description="where the climate is", json_schema_extra={"allowed": ", ".join(ClimatePlaceTable.model_fields)}
    )
    months: MonthsTable = Field(
        description="the twelve means", json_schema_extra={"allowed": ", ".join(MonthsTable.model_fields)}
    )


def read_climate(path: Path) -> Climate:
    """Read and check a climate file.

    Parameters
    ----------
    path
        TOML file.

    Returns
    -------
    Climate
        Twelve months that a year can have.

    Raises
    ------
    InputError
        All faults together: first those of the file's form, then, of a file in form, those of its sunlight.
    """
    given, where = read_table(path, model=ClimateFile, kind="climate file", do="check the path")
    months = given.months
    climate = Climate(
        site=_site(given.place),
        ghi_kWh_m2=np.array(months.ghi_kWh_m2, dtype=float),
        t_air=np.array(months.air_C, dtype=float) + zero_Celsius,
        t_range=_array(months.range_K),
        t_spread=_array(months.daily_K),
        humidity=_array(months.humidity_percent, unit=0.01),
        wind=_array(months.wind_m_s),
    )
    tables = dict.fromkeys(ClimatePlaceTable.model_fields, "place") | dict.fromkeys(BOUNDS, "months")
    faults = climate_problems(climate, frame=frame_of(climate.site), where=lambda key: where((tables[key], key)))
    if faults:
        raise InputError(faults)
    return climate


def _site(place: ClimatePlaceTable) -> Site:
    return Site(
        name=" ".join(place.name.split()),
        latitude_deg=place.latitude,
        longitude_deg=place.longitude,
        altitude_m=place.altitude_m,
        utc_offset_h=place.utc_offset_h,
    )


def _array(values: list[float] | None, *, unit: float = 1.0) -> Floats | None:
    return None if values is None else unit * np.array(values, dtype=float)
