"""The European typical year (PVGIS), as CSV and as JSON: stamps in UTC, the satellite's minute of the hour in the header."""

from __future__ import annotations

import io
import json
from pathlib import Path

import numpy as np
import pandas as pd
from pvlib import iotools
from scipy.constants import zero_Celsius

from weather.errors import InputError, Problem
from weather.formats.raw import Raw, dew_point, naive, number, numbers
from weather.year import Site

__all__ = ["read_pvgis_csv", "read_pvgis_json"]

NAMES = {"ghi": "G(h)", "dni": "Gb(n)", "dhi": "Gd(h)", "wind": "WS10m", "longwave": "IR(h)", "pressure": "SP"}


def read_pvgis_csv(text: str, path: Path) -> Raw:
    """A European typical year in CSV.

    Parameters
    ----------
    text
        The file's content.
    path
        For messages.

    Returns
    -------
    Raw
        Stamps in UTC; radiation stands at the header's irradiance time offset after them.
    """
    lines = [line.strip() for line in text.splitlines()]
    rows = next((row for row, line in enumerate(lines) if line.startswith("time(UTC)")), len(lines))
    head = {
        name.partition("(")[0].strip().lower(): value for name, _, value in (e.partition(":") for e in lines[:rows])
    }
    _refuse_short(sum(line[:8].isdigit() for line in lines[rows + 1 :]), path=path)
    frame, _ = iotools.read_pvgis_tmy(
        io.BytesIO("\n".join(_plain_head(lines, rows)).encode()), pvgis_format="csv", map_variables=False
    )
    return _raw(frame, {key: number(value) for key, value in head.items()})


def _plain_head(lines: list[str], rows: int) -> list[str]:
    """The lines with a place that is read elsewhere, so that a blank in it is no fault yet."""
    months = [line for line in lines[:rows] if line.partition(",")[0].isdigit()]
    return ["Latitude: 0", "Longitude: 0", "Elevation: 0", "month,year", *months, *lines[rows:]]


def read_pvgis_json(text: str, path: Path) -> Raw:
    """A European typical year in JSON.

    Parameters
    ----------
    text
        The file's content.
    path
        For messages.

    Returns
    -------
    Raw
        As from the CSV.
    """
    found = json.loads(text)
    _refuse_short(len(found["outputs"]["tmy_hourly"]), path=path)
    frame, _ = iotools.read_pvgis_tmy(io.StringIO(text), pvgis_format="json", map_variables=False)
    place = found["inputs"]["location"]
    return _raw(frame, {key.replace("_", " "): number(str(value)) for key, value in place.items()})


def _refuse_short(rows: int, *, path: Path) -> None:
    if rows < 8760:
        what, do = "European typical year is cut off", "download it again"
        raise InputError(Problem(where=str(path), what=what, got=f"{rows} hourly rows", allowed="8760", do=do))


def _raw(frame: pd.DataFrame, place: dict[str, float]) -> Raw:
    offset = place.get("irradiance time offset", np.nan)
    longitude = place.get("longitude", np.nan)
    hours = 0.0 if np.isnan(longitude) else float(round(longitude / 15.0))
    t_air = numbers(frame, "T2m") + zero_Celsius
    index = naive(frame.index)
    said = [f"the file is in UTC: local standard time, for the months, taken as UTC{hours:+g} h from the longitude"]
    if np.isnan(offset):
        said.append("the header has no irradiance time offset: radiation taken as standing on the stamp")
    columns = {name: numbers(frame, column) for name, column in NAMES.items()}
    return Raw(
        format="European typical year (PVGIS)",
        stamp="middle",
        rule_min=0.0 if np.isnan(offset) else round(60.0 * offset, 2),
        site=Site(
            name="European typical year",
            latitude_deg=place.get("latitude", np.nan),
            longitude_deg=longitude,
            altitude_m=place.get("elevation", np.nan),
            utc_offset_h=hours,
        ),
        index=index,
        columns=columns | {"t_air": t_air, "t_dew": dew_point(t_air, numbers(frame, "RH") / 100.0)},
        years=tuple(sorted({int(year) for year in index.year})),
        utc=True,
        said=tuple(said),
    )
