"""Real years that come with pvlib's own package, and the way from a scenario's weather entry to a year."""

from __future__ import annotations

import difflib
import os.path
from collections.abc import Mapping
from dataclasses import replace
from pathlib import Path
from typing import TYPE_CHECKING, TypedDict, Unpack

from weather.errors import InputError, Problem
from weather.year import WeatherYear

if TYPE_CHECKING:
    from weather.formats.table import Columns

__all__ = ["STATIONS", "Reading", "open_weather"]

STATIONS = {
    "greensboro": ("723170TYA.CSV", "Greensboro, North Carolina, 36.10 N 79.95 W; TMY3, 8760 h"),
    "sand-point": ("703165TY.csv", "Sand Point, Alaska, 55.32 N 160.52 W; TMY3, 8760 h"),
    "miami": ("12839.tm2", "Miami, Florida, 25.80 N 80.27 W; TMY2, 8760 h"),
}


class Reading(TypedDict, total=False):
    """How a file is to be read: see ``weather.files.read``."""

    columns: Columns | None
    decomposition: str
    year: int | None


def open_weather(
    name: str, *, base: Path, place: Mapping[str, float] | None = None, **reading: Unpack[Reading]
) -> WeatherYear:
    """Weather by a bundled station's name or by a file's path.

    Parameters
    ----------
    name
        A key of ``STATIONS``, or a path.
    base
        Folder that a path counts from.
    place
        Values that take the place of the file's own header, as for ``weather.files.read``.
    **reading
        As for ``weather.files.read``; a station knows its columns itself.

    Returns
    -------
    WeatherYear
        Complete and checked.

    Raises
    ------
    InputError
        No such station or file, or a file that is not a usable year.
    """
    from weather.files import read

    if name in STATIONS:
        import pvlib

        file, _ = STATIONS[name]
        reading["columns"] = None
        found = read(Path(pvlib.__file__).parent / "data" / file, place=place, **reading)
        return replace(found, file=f"{name} ({file}, from pvlib's package data)")
    path = base / name
    if not os.path.exists(path) and "." not in Path(name).name:  # noqa: PTH110 # pathlib's raises where the system refuses a path
        close = difflib.get_close_matches(name, STATIONS, n=1)
        do = f"did you mean {close[0]!r}?" if close else "name a station, or give a file's path"
        what = "neither a bundled station nor a file"
        raise InputError(Problem(where="place.weather", what=what, got=repr(name), allowed=", ".join(STATIONS), do=do))
    return read(path, place=place, **reading)
