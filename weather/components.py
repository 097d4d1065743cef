"""Global, direct and diffuse where a file lacks one or two of them: by closure, or by a published decomposition."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np
import pandas as pd

from weather.closure import RADIATION
from weather.errors import InputError, Problem
from weather.sun import Sun
from weather.year import Floats

__all__ = ["DECOMPOSITIONS", "MEASURED", "completed"]

Instants = np.ndarray[Any, np.dtype[np.datetime64]]
Days = np.ndarray[Any, np.dtype[Any]]
DECOMPOSITIONS = {
    "erbs": "diffuse fraction from clearness; Erbs, Klein & Duffie 1982, Solar Energy 28, 293",
    "disc": "direct from clearness and air mass; Maxwell 1987, SERI/TR-215-3087",
    "boland": "diffuse fraction by a logistic curve; Boland, Scott & Luther 2001, Environmetrics 12, 103",
}
MEASURED = {  # what the bundled years' own DNI says of each: rms of the hour [W/m2], the year's sum [%] from and to
    "erbs": (82, 91, -22, -7),
    "disc": (64, 73, -6, -4),
    "boland": (85, 96, -22, -10),
}
LOWEST_SUN = 0.065  # cosine of the zenith angle, below which a division by it tells nothing


def completed(
    columns: Mapping[str, Floats], *, sun: Sun, time: Instants, model: str, file: str
) -> tuple[dict[str, Floats], str | None, list[str]]:
    """The three columns of radiation, with those made that the file does not have.

    Parameters
    ----------
    columns
        On the hourly axis; a column that is absent, or NaN throughout, is one that the file does not have.
    sun
        At the middle of the hours by the format's rule.
    time
        Those instants, UTC.
    model
        Key of ``DECOMPOSITIONS``, where GHI stands alone.
    file
        For messages.

    Returns
    -------
    dict
        ``ghi``, ``dni``, ``dhi``.
    str or None
        What was made, and how; None if the file has all three.
    list of str
        The notice on it.

    Raises
    ------
    InputError
        None of the three ways is open.
    """
    known = {name: columns[name] for name in RADIATION if name in columns and np.isfinite(columns[name]).any()}
    cosine = np.maximum(np.cos(np.radians(sun.apparent_zenith_deg)), 0.0)
    if len(known) == 3:
        return known, None, []
    if set(known) == {"ghi"}:
        return _decomposed(known["ghi"], sun=sun, time=time, model=model)
    if len(known) == 2:
        made, way = _by_closure(known, cosine=cosine, sun=sun)
        said = f"the file has no {made.upper()}: made by closure, {way}, at the format's time of day; nothing is left to check it"
        return known, f"{made} by closure", [said]
    got = " and ".join(name.upper() for name in known) or "none of them"
    allowed = "GHI alone, or two of GHI, DNI and DHI, or all three"
    do = "use a file that has them, or name their columns under [place.columns]"
    raise InputError(Problem(where=file, what="not enough radiation in the file", got=got, allowed=allowed, do=do))


def _by_closure(known: dict[str, Floats], *, cosine: Floats, sun: Sun) -> tuple[str, str]:
    """Add the third column to two; its name, and the equation."""
    if "ghi" not in known:
        known["ghi"] = known["dhi"] + known["dni"] * cosine
        return "ghi", "GHI = DHI + DNI cos z"
    if "dhi" not in known:
        known["dhi"] = np.clip(known["ghi"] - known["dni"] * cosine, 0.0, np.maximum(known["ghi"], 0.0))
        return "dhi", "DHI = GHI - DNI cos z, from 0 to GHI"
    high = cosine > LOWEST_SUN
    beam = np.clip((known["ghi"] - known["dhi"]) / np.where(high, cosine, 1.0), 0.0, sun.dni_extra)
    known["dni"] = np.where(high | np.isnan(beam), beam, 0.0)
    return "dni", f"DNI = (GHI - DHI)/cos z where the sun is {np.degrees(np.arcsin(LOWEST_SUN)):.1f} deg high, else 0"


def _decomposed(ghi: Floats, *, sun: Sun, time: Instants, model: str) -> tuple[dict[str, Floats], str, list[str]]:
    known, whole = np.isfinite(ghi), np.maximum(np.nan_to_num(ghi), 0.0)
    dni = _direct(whole, sun=sun, day=pd.DatetimeIndex(time).day_of_year.to_numpy(), model=model)
    cosine = np.maximum(np.cos(np.radians(sun.apparent_zenith_deg)), 0.0)
    dhi = np.maximum(whole - dni * cosine, 0.0)
    low, high, least, most = MEASURED[model]
    source = DECOMPOSITIONS[model].partition("; ")[2]
    said = (
        f"the file has GHI alone: DNI and DHI by the decomposition '{model}' ({source}). On the three bundled years it misses "
        f"the file's DNI by {low} to {high} W/m2 rms over the hours with sun and the year's DNI by {least:+d} to {most:+d} %; "
        "published comparisons of such relations find 60 to 120 W/m2 rms (from memory)"
    )
    made = {"ghi": ghi, "dni": np.where(known, dni, np.nan), "dhi": np.where(known, dhi, np.nan)}
    return made, f"dni and dhi by '{model}'", [said]


def _direct(ghi: Floats, *, sun: Sun, day: Days, model: str) -> Floats:
    from pvlib import irradiance

    zenith = sun.apparent_zenith_deg
    if model == "disc":
        found = irradiance.disc(ghi, zenith, day)
    elif model == "erbs":
        found = irradiance.erbs(ghi, zenith, day)
    else:
        found = irradiance.boland(ghi, zenith, day, a_coeff=7.997, b_coeff=0.586)
    return np.asarray(np.clip(np.nan_to_num(np.asarray(found["dni"], dtype=float)), 0.0, sun.dni_extra))
