"""Closure of GHI against DHI + DNI cos z over shifts of the clock, and what it says of columns and of the hemisphere."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from itertools import permutations

import numpy as np

from weather.findings import Finding
from weather.sun import Sun
from weather.year import Floats

__all__ = ["RADIATION", "closure_of", "suspicions"]

RADIATION = ("ghi", "dni", "dhi")
SUSPECT = 25.0  # W/m2 of closure error at the best time of day, from which another reading of the file is tried
BETTER = 0.4  # of that error, at which another reading is believed
SWAP = "swap them in the file, or under [place.columns]"
BEAM = 50.0  # W/m2, from which an hour counts
WIDE = np.arange(-300.0, 301.0, 30.0)  # min of the clock


def closure_of(sun: Sun, *, latitude_deg: float, ghi: Floats, dni: Floats, dhi: Floats) -> Callable[[Floats], Floats]:
    """Error of closure as a function of a shift of the clock.

    Parameters
    ----------
    sun
        At the middle of each hour as the format's rule has it, n hours.
    latitude_deg
        Of the place [deg].
    ghi, dni, dhi
        ``(n,)`` [W/m2].

    Returns
    -------
    callable
        From shifts [min], ``(m,)``, to rms errors over the hours with beam [W/m2], ``(m,)``.
    """
    beam = dni > BEAM
    lit = {"ghi": ghi[beam], "dni": dni[beam], "dhi": dhi[beam]}
    latitude, declination = np.radians(latitude_deg), np.radians(sun.declination_deg[beam])
    level, swing = np.sin(latitude) * np.sin(declination), np.cos(latitude) * np.cos(declination)

    def closure(shifts: Floats) -> Floats:
        """Error at each shift [W/m2]."""
        turned = np.radians(sun.hour_angle_deg[beam] + shifts[:, np.newaxis] / 4.0)
        cosine = np.maximum(level + swing * np.cos(turned), 0.0)
        error = lit["dhi"] + lit["dni"] * cosine - lit["ghi"]
        return np.asarray(np.sqrt(np.mean(error**2, axis=1)))

    return closure


def suspicions(sun: Sun, *, latitude_deg: float, columns: Mapping[str, Floats], best: float | None) -> list[Finding]:
    """Other readings of the three columns, or of the latitude's sign, under which they close far better.

    Parameters
    ----------
    sun
        At the middle of each hour as the format's rule has it, n hours.
    latitude_deg
        As given [deg].
    columns
        ``ghi``, ``dni``, ``dhi``, without NaN.
    best
        Closure error as the file is read, at the best time of day [W/m2]; None if no time of day was found.

    Returns
    -------
    list of Finding
        The best other reading, if there is one to believe.
    """
    best = _error(sun, latitude_deg=latitude_deg, columns=columns) if best is None else best
    if best < SUSPECT:
        return []
    hours = int(np.count_nonzero(columns["ghi"] > 0.0))
    readings = {}
    for order in permutations(RADIATION):
        renamed = {name: columns[other] for name, other in zip(RADIATION, order, strict=True)}
        for sign in (1.0, -1.0):
            if order == RADIATION and sign > 0.0:
                continue
            readings[order, sign] = _error(sun, latitude_deg=sign * latitude_deg, columns=renamed)
    (order, sign), least = min(readings.items(), key=lambda pair: pair[1])
    if not least < BETTER * best:
        return []
    found = []
    if order != RADIATION:
        words = ", ".join(
            f"what stands as {o.upper()} is {n.upper()}" for n, o in zip(RADIATION, order, strict=True) if n != o
        )
        what = (
            f"columns of radiation are in another order: {words} (closure error {least:.0f} instead of {best:.0f} W/m2)"
        )
        found.append(Finding(name="swapped-columns", severity="stop", what=what, hours=hours, do=SWAP))
    if sign < 0.0:
        what = (
            f"the sun's year is that of the other hemisphere: latitude {-latitude_deg:g} fits instead of {latitude_deg:g} "
            f"(closure error {least:.0f} instead of {best:.0f} W/m2)"
        )
        do = "mend the latitude's sign (south is negative) in the header or under [place]"
        found.append(Finding(name="hemisphere", severity="stop", what=what, hours=hours, do=do))
    return found


def _error(sun: Sun, *, latitude_deg: float, columns: Mapping[str, Floats]) -> float:
    if np.count_nonzero(columns["dni"] > BEAM) < 200:
        return np.inf
    return float(closure_of(sun, latitude_deg=latitude_deg, **columns)(WIDE).min())
