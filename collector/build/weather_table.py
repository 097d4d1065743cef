"""The part of a scenario that maps a weather table's columns."""

from __future__ import annotations

from typing import Annotated, Literal

from pydantic import BeforeValidator, Field, WithJsonSchema, model_validator

from collector.build.table import Table, fault, quantity
from weather.formats.table import Columns

__all__ = ["ColumnsTable"]

_Name = Annotated[str, Field(min_length=1)]
_Names = Annotated[
    list[_Name],
    Field(min_length=1, max_length=6),
    BeforeValidator(lambda given: given if isinstance(given, list) else [given]),
    WithJsonSchema({"anyOf": [{"type": "string"}, {"type": "array", "items": {"type": "string"}}]}),
]


class ColumnsTable(Table):
    """Names and units of the columns of a weather table in CSV."""

    time: _Names = Field(description="the stamp's column, or a list that makes it up, as date and clock")
    time_format: str | None = Field(None, min_length=2, description="as for strptime; ISO 8601 if absent")
    stamp: Literal["start", "middle", "end"] = Field(description="which instant of its step a stamp marks")
    ghi: _Name | None = Field(None, description="global horizontal irradiance; alone, or with dni, dhi or both")
    dni: _Name | None = Field(None, description="direct normal irradiance")
    dhi: _Name | None = Field(None, description="diffuse horizontal irradiance")
    t_air: _Name = Field(description="air temperature")
    wind: _Name = Field(description="wind speed")
    t_dew: _Name | None = Field(None, description="dew point")
    humidity: _Name | None = Field(None, description="or: relative humidity in %")
    cloud: _Name | None = Field(None, description="cloud cover")
    longwave: _Name | None = Field(None, description="long-wave irradiance from the sky, W/m2")
    pressure: _Name | None = Field(None, description="air pressure")
    irradiance_unit: Literal["W/m2", "Wh/m2", "kJ/m2", "MJ/m2"] = Field(
        default="W/m2", description="the last three are a step's sum"
    )
    temperature_unit: Literal["C", "K", "F"] = Field(default="C", description="of air and dew point")
    wind_unit: Literal["m/s", "km/h", "mph", "kn"] = Field(default="m/s", description="of the wind")
    cloud_unit: Literal["fraction", "%", "tenths", "oktas"] = Field(default="fraction", description="of the cloud")
    pressure_unit: Literal["Pa", "hPa", "kPa"] = Field(default="hPa", description="of the pressure")
    separator: Literal[",", ";", "\t", " ", "|"] = Field(default=",", description="between fields")
    decimal: Literal[".", ","] = Field(default=".", description="in numbers")
    missing: list[float] = Field(
        default_factory=list, description="numbers that mark a missing value", json_schema_extra={"unit": ""}
    )
    skip_rows: int = quantity(0, 1000, "", doc="rows before the one with the names", default=0)

    @model_validator(mode="after")
    def _check(self) -> ColumnsTable:
        self._one_of((("t_dew",), ("humidity",)), optional=True)
        if self.ghi is None and (self.dni is None or self.dhi is None):
            raise fault("not enough radiation", key="ghi", allowed="ghi, or dni with dhi")
        if self.separator == self.decimal:
            raise fault(
                "separator and decimal are the same", key="decimal", allowed="a point where fields are split by commas"
            )
        return self

    def mapping(self) -> Columns:
        """Return the same for the reader."""
        given = {name: getattr(self, name) for name in type(self).model_fields}
        return Columns(**given | {"time": tuple(self.time), "missing": tuple(self.missing)})
