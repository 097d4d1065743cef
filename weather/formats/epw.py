"""EPW: hours 1 to 24, which pvlib stamps at their start; marks of nines for what is missing."""

from __future__ import annotations

import csv
import io
from pathlib import Path

from pvlib import iotools
from scipy.constants import zero_Celsius

from weather.errors import InputError, Problem
from weather.formats.raw import Raw, marked, naive, plain, positive, site_of

__all__ = ["read_epw"]


def read_epw(text: str, path: Path) -> Raw:
    """An EPW file.

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

    Raises
    ------
    InputError
        The line LOCATION does not have its ten fields.
    """
    head = next(csv.reader([text.partition("\n")[0]]))
    if len(head) != 10:
        what = "EPW header LOCATION needs ten fields; a comma in the place's name shifts the others"
        raise InputError(
            Problem(where=f"{path}:1", what=what, got=f"{len(head)} fields: {','.join(head)}", do="mend the first line")
        )
    header = "LOCATION,city,-,-,-,0,0,0,0,0"  # the place is read here, where a blank is no fault yet
    frame, _ = iotools.read_epw(io.StringIO(f"{header}\n" + text.partition("\n")[2]))
    columns = {
        "ghi": marked(frame, "ghi", 9999),
        "dni": marked(frame, "dni", 9999),
        "dhi": marked(frame, "dhi", 9999),
        "t_air": marked(frame, "temp_air", 99.9) + zero_Celsius,
        "t_dew": marked(frame, "temp_dew", 99.9) + zero_Celsius,
        "wind": marked(frame, "wind_speed", 999),
        "cloud": marked(frame, "opaque_sky_cover", 99) / 10.0,
        "longwave": marked(frame, "ghi_infrared", 9999),
        "albedo": positive(marked(frame, "albedo", 999)),
        "pressure": marked(frame, "atmospheric_pressure", 999999),
    }
    index = naive(frame.index)
    years = tuple(sorted({int(year) for year in index.year}))
    latitude, longitude, offset, altitude = head[6:]
    site = site_of(plain(head[1]), latitude, longitude, altitude=altitude, offset=offset)
    return Raw(format="EPW", stamp="start", rule_min=30.0, site=site, index=index, columns=columns, years=years)
