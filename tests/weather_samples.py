"""Weather files made for tests: an EPW year of our own, and the bundled TMY3 and TMY2 years with lines altered."""

from __future__ import annotations

import calendar
from functools import lru_cache
from pathlib import Path

import numpy as np
import pandas as pd
import pvlib

EPW = {  # place of each column in a row, from the EPW data dictionary
    "year": 0, "month": 1, "day": 2, "hour": 3, "minute": 4, "t_air": 6, "t_dew": 7, "pressure": 9, "longwave": 12,
    "ghi": 13, "dni": 14, "dhi": 15, "wind": 21, "total_cloud": 22, "cloud": 23, "albedo": 32,
}  # fmt: skip
EPW_MISSING = {  # the format's own marks for "missing"
    "t_air": "99.9", "t_dew": "99.9", "pressure": "999999", "longwave": "9999", "ghi": "9999", "dni": "9999",
    "dhi": "9999", "wind": "999", "cloud": "99", "albedo": "999",
}  # fmt: skip
TMY3_NAMES = {
    "date": "Date (MM/DD/YYYY)", "time": "Time (HH:MM)", "ghi": "GHI (W/m^2)", "dni": "DNI (W/m^2)",
    "dhi": "DHI (W/m^2)", "t_air": "Dry-bulb (C)", "t_dew": "Dew-point (C)", "cloud": "OpqCld (tenths)",
    "wind": "Wspd (m/s)", "pressure": "Pressure (mbar)", "albedo": "Alb (unitless)", "albedo_source": "Alb source",
}  # fmt: skip
TMY2 = {  # first and last character of each field, from the TMY2 manual's table of positions (a blank stands first)
    "year": (1, 3), "month": (3, 5), "day": (5, 7), "hour": (7, 9), "ghi": (17, 21), "dni": (23, 27), "dhi": (29, 33),
    "cloud": (63, 65), "t_air": (67, 71), "t_dew": (73, 77), "pressure": (84, 88), "wind": (95, 98),
}  # fmt: skip
TMY2_MISSING = {"ghi": "9999", "dni": "9999", "dhi": "9999", "t_air": "9999", "t_dew": "9999", "wind": "999"}
ROWS = list[list[str]]


def hour_of_year(month: int, day: int, hour: int) -> int:
    """Row of a plain year in which this hour of the day (0 to 23) begins."""
    return (pd.Timestamp(2005, month, day, hour) - pd.Timestamp(2005, 1, 1)) // pd.Timedelta(hours=1)


def epw_rows(*, year: int = 2005, minute: int = 60) -> ROWS:
    """A year's rows at 45 N, 10 E, UTC+1, with GHI = DHI + DNI cos z at mid-hour; 8784 of them in a leap year."""
    return [[*row[:4], str(minute), *row[5:]] for row in _epw_rows(year)]


@lru_cache(maxsize=2)
def _epw_rows(year: int) -> tuple[tuple[str, ...], ...]:
    index = pd.date_range(f"{year}-01-01", periods=8784 if calendar.isleap(year) else 8760, freq="h")
    middle = (index + pd.Timedelta(minutes=30)).tz_localize(3600)
    zenith = pvlib.solarposition.get_solarposition(middle, 45.0, 10.0, altitude=100.0)["zenith"].to_numpy()
    cosine = np.maximum(np.cos(np.radians(zenith)), 0.0)
    dni = 950.0 * cosine**0.3  # of a clear day, about
    dhi = 90.0 * cosine**0.5
    ghi = dhi + dni * cosine
    t_air = 12.0 - 10.0 * np.cos(2.0 * np.pi * index.day_of_year.to_numpy() / 365.0) + 6.0 * cosine
    return tuple(
        (
            str(stamp.year), str(stamp.month), str(stamp.day), str(stamp.hour + 1), "0", "?9",
            f"{t_air[row]:.1f}", f"{t_air[row] - 5.0:.1f}", "70", "100100", "0", "0", "310",
            f"{ghi[row]:.1f}", f"{dni[row]:.1f}", f"{dhi[row]:.1f}", "0", "0", "0", "0", "180", "2.5", "3", "2",
            "20.0", "7777", "9", "999999999", "15", "0.1", "0", "88", "0.2", "0.0", "1.0",
        )
        for row, stamp in enumerate(index)
    )  # fmt: skip


def epw_text(
    rows: ROWS,
    *,
    city: str = "Testfield",
    latitude: str = "45.0",
    longitude: str = "10.0",
    offset: str = "1.0",
    altitude: str = "100.0",
) -> str:
    """EPW file: the line LOCATION, seven more of a header, and the rows."""
    head = [
        f"LOCATION,{city},-,XXX,made,000000,{latitude},{longitude},{offset},{altitude}",
        "DESIGN CONDITIONS,0",
        "TYPICAL/EXTREME PERIODS,0",
        "GROUND TEMPERATURES,0",
        "HOLIDAYS/DAYLIGHT SAVINGS,No,0,0,0",
        "COMMENTS 1,made for a test",
        "COMMENTS 2,",
        "DATA PERIODS,1,1,Data,Sunday,1/1,12/31",
    ]
    return "\n".join([*head, *(",".join(row) for row in rows)]) + "\n"


def set_epw(rows: ROWS, name: str, *, hours: range, value: str) -> ROWS:
    """The same rows with one column replaced in some hours."""
    for row in hours:
        rows[row][EPW[name]] = value
    return rows


def _package_lines(name: str) -> list[str]:
    return (Path(pvlib.__file__).parent / "data" / name).read_text(encoding="latin-1").splitlines()


class Tmy3:
    """Greensboro's TMY3 lines, to be altered."""

    def __init__(self) -> None:
        self.head, names, *rows = _greensboro()
        self.names = names.split(",")
        self.rows = [row.split(",") for row in rows]

    def set(self, name: str, *, hours: range, value: str) -> Tmy3:
        place = self.names.index(TMY3_NAMES[name])
        for row in hours:
            self.rows[row][place] = value
        return self

    @property
    def text(self) -> str:
        return "\n".join([self.head, ",".join(self.names), *(",".join(row) for row in self.rows)]) + "\n"


class Tmy2:
    """Miami's TMY2 lines, to be altered."""

    def __init__(self) -> None:
        self.head, *self.rows = _miami()

    def set(self, name: str, *, hours: range, value: str) -> Tmy2:
        first, last = TMY2[name]
        for row in hours:
            self.rows[row] = self.rows[row][:first] + value.rjust(last - first) + self.rows[row][last:]
        return self

    @property
    def text(self) -> str:
        return "\n".join([self.head, *self.rows]) + "\n"


@lru_cache(maxsize=1)
def _greensboro() -> tuple[str, ...]:
    return tuple(_package_lines("723170TYA.CSV"))


@lru_cache(maxsize=1)
def _miami() -> tuple[str, ...]:
    return tuple(_package_lines("12839.tm2"))
