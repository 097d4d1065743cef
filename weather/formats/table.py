"""Any table in CSV whose columns and units the scenario names under ``[place.columns]``."""

from __future__ import annotations

import csv
import io
from dataclasses import dataclass
from pathlib import Path

import numpy as np
import pandas as pd
from scipy.constants import zero_Celsius

from weather.errors import InputError, Problem
from weather.formats.raw import Convention, Raw, dew_point, numbers, site_of
from weather.hours import step_of
from weather.year import Floats

__all__ = ["CLOUDS", "HEATS", "PRESSURES", "SPEEDS", "SUNS", "Columns", "read_table_of"]

# factor, then offset [K]
HEATS = {"C": (1.0, zero_Celsius), "K": (1.0, 0.0), "F": (5.0 / 9.0, zero_Celsius - 160.0 / 9.0)}
SUNS = {"W/m2": None, "Wh/m2": 3600.0, "kJ/m2": 1e3, "MJ/m2": 1e6}  # J in one of those that are a step's sum
SPEEDS = {"m/s": 1.0, "km/h": 1.0 / 3.6, "mph": 0.44704, "kn": 1852.0 / 3600.0}  # m/s
CLOUDS = {"fraction": 1.0, "%": 0.01, "tenths": 0.1, "oktas": 0.125}
PRESSURES = {"Pa": 1.0, "hPa": 100.0, "kPa": 1e3}  # Pa
ZONED = r"(?:Z|[+-]\d{2}:?\d{2})$"


@dataclass(frozen=True, kw_only=True)
class Columns:
    """Names of a table's columns, their units, and what its stamps mark.

    Parameters
    ----------
    time
        The stamp's column, or several that make it up together, as date and clock.
    time_format
        As for ``strptime``; None for ISO 8601, such as 2015-01-31 13:00.
    stamp
        Which instant of its step a stamp marks.
    ghi, dni, dhi, t_air, wind, t_dew, humidity, cloud, longwave, pressure
        Names; None for what the table lacks.
    irradiance_unit, temperature_unit, wind_unit, cloud_unit, pressure_unit
        Keys of ``SUNS``, ``HEATS``, ``SPEEDS``, ``CLOUDS`` and ``PRESSURES``. Long wave is in W/m2, humidity in %.
    separator, decimal
        Between fields, and in numbers.
    missing
        Numbers that mark a missing value.
    skip_rows
        Rows before the one with the names.
    """

    time: tuple[str, ...]
    stamp: Convention
    time_format: str | None = None
    ghi: str | None = None
    dni: str | None = None
    dhi: str | None = None
    t_air: str | None = None
    wind: str | None = None
    t_dew: str | None = None
    humidity: str | None = None
    cloud: str | None = None
    longwave: str | None = None
    pressure: str | None = None
    irradiance_unit: str = "W/m2"
    temperature_unit: str = "C"
    wind_unit: str = "m/s"
    cloud_unit: str = "fraction"
    pressure_unit: str = "hPa"
    separator: str = ","
    decimal: str = "."
    missing: tuple[float, ...] = ()
    skip_rows: int = 0


def read_table_of(text: str, path: Path, *, columns: Columns, utc_offset_h: float = np.nan) -> Raw:
    """Read a table by its mapping.

    Parameters
    ----------
    text
        The file's content.
    path
        For messages.
    columns
        The mapping.
    utc_offset_h
        Of the place, if it is known: stamps that carry their own zone are brought to it.

    Returns
    -------
    Raw
        Without a place: that is the scenario's.

    Raises
    ------
    InputError
        A column is not there, or the stamps can't be read.
    """
    frame = _frame(text, columns)
    _refuse_absent(frame, columns, path=path)
    index, utc = _index(frame, columns, path=path)
    if utc and not np.isnan(utc_offset_h):
        index, utc = index + pd.Timedelta(hours=utc_offset_h), False
    step = step_of(index, file=str(path))
    rule = {"start": 0.5 * step, "middle": 0.0, "end": -0.5 * step}[columns.stamp]
    return Raw(
        format="table by [place.columns]",
        stamp=columns.stamp,
        rule_min=rule,
        site=site_of(path.stem, "", "", altitude="", offset=""),
        index=index,
        columns=_in_si(frame, columns, step_min=step),
        years=tuple(sorted({int(year) for year in index.year})),
        utc=utc,
        step_min=step,
        said=(f"stamps mark the {columns.stamp} of a step of {step:g} min, as [place.columns] says",),
    )


def _frame(text: str, columns: Columns) -> pd.DataFrame:
    """The table as text; rows longer than the head are a fault, and told as one."""
    rows = list(csv.reader(io.StringIO(text), delimiter=columns.separator))[columns.skip_rows :]
    head = [name.strip() for name in rows[0]] if rows else []
    whole = [(row + [""] * len(head))[: len(head)] for row in rows[1:] if any(field.strip() for field in row)]
    return pd.DataFrame(whole, columns=head)


def _refuse_absent(frame: pd.DataFrame, columns: Columns, *, path: Path) -> None:
    named = {name: f"place.columns.{key}" for key in vars(columns) if isinstance(name := getattr(columns, key), str)}
    wanted = {
        name: key
        for name, key in named.items()
        if not key.endswith(("_unit", "_format", "separator", "decimal", "stamp"))
    }
    wanted |= dict.fromkeys(columns.time, "place.columns.time")
    shown = ", ".join(str(name) for name in frame.columns)[:200] or "nothing"
    problems = [
        Problem(
            where=f"{path}:{columns.skip_rows + 1}",
            what=f"no single column of the name that {key} gives",
            got=repr(name),
            allowed=shown,
            do="mend the name under [place.columns], or separator and skip_rows if the row of names is another",
        )
        for name, key in wanted.items()
        if list(frame.columns).count(name) != 1
    ]
    if problems:
        raise InputError(problems)


def _index(frame: pd.DataFrame, columns: Columns, *, path: Path) -> tuple[pd.DatetimeIndex, bool]:
    """Stamps, and whether they carry their own way to UTC."""
    words = frame[columns.time[0]].str.strip()
    for name in columns.time[1:]:
        words = words + " " + frame[name].str.strip()
    zoned = bool(len(words)) and columns.time_format is None and bool(words.str.contains(ZONED).all())
    late = words.str.contains(r"(?:^|[\sT])24:00")
    words = words.mask(late, words.str.replace("24:00", "00:00"))
    form = columns.time_format or "ISO8601"
    stamps = pd.to_datetime(words, format=form, errors="coerce", utc=zoned)
    if (bad := stamps.isna().to_numpy()).any():
        row = int(np.argmax(bad))
        raise InputError(
            Problem(
                where=f"{path}, data row {row + 1}",
                what="time stamp can't be read",
                got=repr(words.iloc[row]),
                allowed=columns.time_format or "such as 2015-01-31 13:00",
                do="give place.columns.time_format, such as '%d.%m.%Y %H:%M'",
            )
        )
    index = pd.DatetimeIndex(stamps.where(~late, stamps + pd.Timedelta(days=1)))
    return index.tz_localize(None), zoned


def _in_si(frame: pd.DataFrame, columns: Columns, *, step_min: float) -> dict[str, Floats]:
    joules = SUNS[columns.irradiance_unit]
    watts = 1.0 if joules is None else joules / (60.0 * step_min)
    slope, zero = HEATS[columns.temperature_unit]
    scales = {
        **dict.fromkeys(("ghi", "dni", "dhi"), (watts, 0.0)),
        **dict.fromkeys(("t_air", "t_dew"), (slope, zero)),
        "wind": (SPEEDS[columns.wind_unit], 0.0),
        "cloud": (CLOUDS[columns.cloud_unit], 0.0),
        "longwave": (1.0, 0.0),
        "pressure": (PRESSURES[columns.pressure_unit], 0.0),
    }
    found = {
        name: _column(frame, getattr(columns, name), columns) * factor + offset
        for name, (factor, offset) in scales.items()
        if getattr(columns, name) is not None
    }
    if columns.humidity is not None and columns.t_dew is None and "t_air" in found:
        found["t_dew"] = dew_point(found["t_air"], _column(frame, columns.humidity, columns) / 100.0)
    return found


def _column(frame: pd.DataFrame, name: str, columns: Columns) -> Floats:
    words = frame[name].str.strip()
    values = numbers(
        pd.DataFrame({name: words.str.replace(columns.decimal, ".") if columns.decimal != "." else words}), name
    )
    values[np.isin(values, columns.missing)] = np.nan
    return values
