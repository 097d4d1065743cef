"""A synthetic year as text, and its file on disk."""

from __future__ import annotations

import os.path
from collections.abc import Mapping
from pathlib import Path
from typing import Any

from collector.show.files import write_new, write_whole
from collector.show.tables import MONTHS, hung, remarks
from weather.errors import InputError, Problem

__all__ = ["refuse_taken", "synthesis_text", "write_year"]

COLUMNS = (  # key, heading, digits after the point
    ("ghi_kWh_m2", "GHI kWh/m2d", 2),
    ("air_C", "air C", 1),
    ("range_K", "range K", 1),
    ("humidity_percent", "humidity %", 0),
    ("wind_m_s", "wind m/s", 1),
)


def synthesis_text(found: Mapping[str, Any]) -> str:
    """A synthetic year on a page.

    Parameters
    ----------
    found
        As the study gives it.

    Returns
    -------
    str
        Lines of at most 80 columns.
    """
    methods = [line for name, words in found["methods"].items() for line in hung(words, head=f"  {name:<19}")]
    blocks = [_head(found), _table(found), ["Methods", *methods], *remarks([found])]
    return "\n\n".join("\n".join(block) for block in blocks) + "\n"


def _head(found: Mapping[str, Any]) -> list[str]:
    place, sums = found["place"], [found[f"{name}_kWh_m2"] for name in ("ghi", "dhi", "dni")]
    north, east = place["latitude"], place["longitude"]
    where = f"{abs(north):.2f} {'N' if north >= 0.0 else 'S'} {abs(east):.2f} {'E' if east >= 0.0 else 'W'}"
    return [
        *hung(found["title"], head=""),
        f"{where}, {place['altitude_m']:g} m, UTC {place['utc_offset_h']:+g} h",
        f"made by chance with seed {found['seed']}; nothing of it was measured",
        *hung(
            f"GHI {sums[0]:.1f}, of it diffuse {sums[1]:.1f}; DNI {sums[2]:.1f} kWh/m2 a year"
            + ("; an upper bound, GHI is not as asked" if found["clear_sky"] else ""),
            head="",
        ),
    ]


def _table(found: Mapping[str, Any]) -> list[str]:
    return [
        "Means  " + "".join(f"{words:>14}" for _, words, _ in COLUMNS),
        "       " + "   asked   met" * len(COLUMNS),
        *(_row(month) for month in found["months"]),
    ]


def _row(month: Mapping[str, Any]) -> str:
    cells = [
        f"{'-' if month[f'asked_{key}'] is None else format(month[f'asked_{key}'] + 0.0, f'.{digits}f'):>8}"
        f"{month[key]:6.{digits}f}"
        for key, _, digits in COLUMNS
    ]
    return f"  {MONTHS[month['month'] - 1]:<5}" + "".join(cells)


def refuse_taken(path: Path, *, replace: bool, source: Path) -> None:
    """Refuse a file that stands in the way, before anything is computed.

    Parameters
    ----------
    path
        Where the year is to go.
    replace
        Whether it may take another file's place.
    source
        The climate's file, whose place it may never take.

    Raises
    ------
    InputError
        There is a file, and it may not be replaced.
    """
    if os.path.lexists(path) and not replace:
        what, do = "there is a file of this name already", "choose another name, or --replace; nothing was changed"
        raise InputError(Problem(where=str(path), what=what, do=do))
    if os.path.realpath(path) == os.path.realpath(source):
        raise InputError(Problem(where="--out", what="that is the climate's own file", got=str(path)))


def write_year(path: Path, text: str, *, replace: bool) -> None:
    """Write the year's file.

    Parameters
    ----------
    path
        Its place.
    text
        Its content.
    replace
        Whether it may take another file's place.
    """
    if replace:
        write_whole(path, write=lambda place: place.write_text(text, encoding="utf-8"))
    else:
        write_new(path, text)
