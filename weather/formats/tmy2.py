"""TMY2: fields at fixed places, values in tenths; pvlib stamps an hour's row at its start."""

from __future__ import annotations

import tempfile
from pathlib import Path

import pandas as pd
from pvlib import iotools
from scipy.constants import zero_Celsius

from weather.formats.raw import Raw, marked, naive, number, site_of
from weather.year import Site

__all__ = ["read_tmy2"]


def read_tmy2(text: str, path: Path) -> Raw:
    """A TMY2 file.

    Parameters
    ----------
    text
        The file's content.
    path
        For messages.

    Returns
    -------
    Raw
        Stamps at the start of the hour.
    """
    head, _, body = text.partition("\n")
    frame = _tmy2_rows(body, name=path.name)
    columns = {
        "ghi": marked(frame, "GHI", 9999),
        "dni": marked(frame, "DNI", 9999),
        "dhi": marked(frame, "DHI", 9999),
        "t_air": marked(frame, "DryBulb", 9999) / 10.0 + zero_Celsius,
        "t_dew": marked(frame, "DewPoint", 9999) / 10.0 + zero_Celsius,
        "wind": marked(frame, "Wspd", 999) / 10.0,
        "cloud": marked(frame, "OpqCld", 99) / 10.0,
        "pressure": marked(frame, "Pressure", 9999) * 100.0,
    }
    years = tuple(sorted({1900 + int(year) % 100 for year in frame["year"]}))
    return Raw(
        format="TMY2",
        stamp="start",
        rule_min=30.0,
        site=_tmy2_site(head),
        index=naive(frame.index),
        columns=columns,
        years=years,
    )


def _tmy2_rows(body: str, *, name: str) -> pd.DataFrame:
    """Rows as pvlib reads them, from a copy in ASCII: it takes a path alone, and a place's name of one word alone."""
    with tempfile.TemporaryDirectory() as folder:
        copy = Path(folder) / "copy.tm2"
        header = " 00000 NAME                   XX   0 N  0  0 E   0  0     0"
        copy.write_text(f"{header}\n{body}", encoding="ascii", errors="replace")
        try:
            frame, _ = iotools.read_tmy2(str(copy))
        except ValueError as fault:
            raise ValueError(str(fault).replace(str(copy), name)) from None
    return frame  # type: ignore[no-any-return] # pvlib ships no types


def _tmy2_site(head: str) -> Site:
    """Place by the columns of the TMY2 manual, in which names of several words fit."""
    return site_of(
        f"{head[7:29].strip().title()} {head[30:32].strip()}".strip(),
        _degrees(head[37:44], sides="NS"),
        _degrees(head[45:53], sides="EW"),
        altitude=head[55:59],
        offset=head[33:36],
    )


def _degrees(field: str, *, sides: str) -> str:
    """Such as "W  80 16" in decimal degrees, negative on the second side; empty if it is not like that."""
    side, words = field[:1], field[1:].split()
    if side not in sides or len(words) != 2:
        return ""
    return str((number(words[0]) + number(words[1]) / 60.0) * (1.0 if side == sides[0] else -1.0))
