"""What is checked of a weather file: limits, gaps, and where in its hour a time stamp stands."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from scipy.constants import zero_Celsius

from weather.closure import BEAM, closure_of
from weather.errors import InputError, Problem
from weather.sun import Sun
from weather.year import Floats, Mask, Site, Stamp

if TYPE_CHECKING:
    import pandas as pd

__all__ = ["LIMITS", "LONGEST_GAP", "Column", "clean_column", "find_stamp", "site_problems"]

LIMITS = {  # hard physical limits: what lies outside is taken as missing
    "ghi": (-15.0, 1600.0, "W/m2"),
    "dni": (-15.0, 1500.0, "W/m2"),
    "dhi": (-15.0, 1200.0, "W/m2"),
    "t_air": (183.15, 333.15, "K"),
    "t_dew": (173.15, 313.15, "K"),
    "wind": (0.0, 75.0, "m/s"),
    "cloud": (0.0, 1.0, ""),
    "longwave": (40.0, 700.0, "W/m2"),
    "albedo": (0.0, 1.0, ""),
    "pressure": (40e3, 110e3, "Pa"),
}
LONGEST_GAP = 3  # h in a row that are filled by a straight line; longer gaps are refused
SHIFT_TOLERANCE = 5.0  # min between a format's rule and the closure
ENOUGH_BEAM = 200  # h with beam, below which closure can't tell
SEARCH = np.arange(-300.0, 301.0, 5.0)  # min from the format's rule; a header passes up to 4 h off (`site_problems`)
FINE = np.arange(-5.0, 5.5, 1.0)  # min around the best of those
POOR = 60.0  # W/m2 of closure error at the best shift, from which on the three columns hardly belong together


@dataclass(frozen=True, kw_only=True)
class Column:
    """A column made whole, and what had to be done to it."""

    values: Floats
    notices: tuple[str, ...]


def clean_column(name: str, *, values: Floats, file: str, stamps: pd.DatetimeIndex) -> Column:
    """Apply limits, fill short gaps, refuse long ones.

    Parameters
    ----------
    name
        A key of ``LIMITS``.
    values
        As read, NaN where the file marks a value as missing, ``(n,)``.
    file
        For messages.
    stamps
        The rows' own time stamps, for messages.

    Returns
    -------
    Column
        Without NaN; small negative irradiance set to 0.

    Raises
    ------
    InputError
        A gap longer than ``LONGEST_GAP`` hours.
    """
    low, high, unit = LIMITS[name]
    wild = np.isfinite(values) & ((values < low) | (values > high))
    said = []
    if wild.any():
        first = int(np.argmax(wild))
        zero, shown = (zero_Celsius, "C") if unit == "K" else (0.0, unit)  # a file's temperatures are in C
        said.append(
            f"{name}: {np.count_nonzero(wild)} h outside {low - zero:g} to {high - zero:g} {shown} taken as missing "
            f"(first {values[first] - zero:g} at {str(stamps[first])[:16]})"
        )
    missing = wild | ~np.isfinite(values)
    _refuse_long_gap(name, missing=missing, file=file, stamps=stamps)
    whole = values.astype(float)
    if missing.any():
        hours = np.arange(len(values))
        whole[missing] = np.interp(hours[missing], hours[~missing], whole[~missing])
        said.append(
            f"{name}: {np.count_nonzero(missing)} h missing, filled in a straight line (gaps up to {LONGEST_GAP} h)"
        )
    negative = whole < 0.0
    if name in {"ghi", "dni", "dhi"} and negative.any():
        said.append(f"{name}: {np.count_nonzero(negative)} h slightly negative set to 0")
        whole = np.maximum(whole, 0.0)
    return Column(values=whole, notices=tuple(said))


def _refuse_long_gap(name: str, *, missing: Mask, file: str, stamps: pd.DatetimeIndex) -> None:
    edges = np.flatnonzero(np.diff(np.r_[False, missing, False].astype(int)))
    starts, lengths = edges[::2], edges[1::2] - edges[::2]
    long = lengths > LONGEST_GAP
    if long.any():
        start, length = int(starts[long][0]), int(lengths[long][0])
        raise InputError(
            Problem(
                where=f"{file}, {str(stamps[start])[:16]}",
                what=f"{name} is missing for {length} h in a row"
                if length < len(missing)
                else f"{name} is missing throughout",
                got=f"{np.count_nonzero(missing)} h missing in {len(starts)} gaps",
                allowed=f"gaps up to {LONGEST_GAP} h, which are filled in a straight line and counted",
                do="mend the file or use another",
            )
        )


def site_problems(site: Site, *, file: str) -> list[Problem]:
    """Faults of a file's place: each number there and in its bounds, and the clock fits the longitude.

    Parameters
    ----------
    site
        As read; NaN where the file has no number.
    file
        For messages.

    Returns
    -------
    list of Problem
        Empty if all is well.
    """
    bounds = {
        "latitude_deg": (-90.0, 90.0),
        "longitude_deg": (-180.0, 180.0),
        "altitude_m": (-450.0, 9000.0),
        "utc_offset_h": (-12.0, 14.0),
    }
    do = "a comma in the place's name shifts the header; mend it, or give the value under [place]"
    found = []
    for name, (low, high) in bounds.items():
        value = getattr(site, name)
        if np.isnan(value):
            what = f"header: {name} is missing"
            found.append(Problem(where=file, what=what, got="no number", allowed=f"{low:g} to {high:g}", do=do))
        elif not low <= value <= high:
            what = f"header: {name} is impossible"
            found.append(Problem(where=file, what=what, got=f"{value:g}", allowed=f"{low:g} to {high:g}", do=do))
    apart = abs((site.longitude_deg / 15.0 - site.utc_offset_h + 12.0) % 24.0 - 12.0)
    if not found and apart > 4.0:
        got = f"longitude {site.longitude_deg:g}, UTC offset {site.utc_offset_h:g} h"
        allowed = "an offset within 4 h of longitude/15"
        found.append(
            Problem(
                where=file, what="header: clock and longitude do not belong together", got=got, allowed=allowed, do=do
            )
        )
    return found


def find_stamp(
    sun: Sun, *, latitude_deg: float, ghi: Floats, dni: Floats, dhi: Floats, rule_min: float, file: str
) -> tuple[Stamp, str]:
    """Time-stamp convention of a file, by closure of GHI against DHI + DNI cos z.

    A shift that is found at an end of the search is refused: it would be a guess. A large error at the best shift is said
    and not refused, since it tells of the three columns and not of the clock, and the year may still be wanted; a shift
    then counts only where it lowers the error by a tenth at least.

    Parameters
    ----------
    sun
        At the middle of each hour as the format's rule has it, n hours.
    latitude_deg
        Of the place [deg].
    ghi, dni, dhi
        ``(n,)`` [W/m2].
    rule_min
        Minutes that the rule adds to the file's stamps.
    file
        For messages.

    Returns
    -------
    Stamp
        The rule's shift where the closure agrees with it to 5 minutes or can't tell, else the one found.
    str
        A notice, empty if all is well.

    Raises
    ------
    InputError
        The closure is best 5 hours from the rule, where the search ends.
    """
    beam = dni > BEAM
    if np.count_nonzero(beam) < ENOUGH_BEAM:
        stamp = Stamp(rule_min=rule_min, found_min=None, used_min=rule_min, rmse_w_m2=None, rmse_unshifted_w_m2=None)
        return (
            stamp,
            f"too little beam ({np.count_nonzero(beam)} h) to find the time-stamp convention: the format's rule is used",
        )
    closure = closure_of(sun, latitude_deg=latitude_deg, ghi=ghi, dni=dni, dhi=dhi)
    return _stamp(closure, rule_min=rule_min, file=file)


def _stamp(closure: Callable[[Floats], Floats], *, rule_min: float, file: str) -> tuple[Stamp, str]:
    coarse = closure(SEARCH)
    near = int(np.argmin(coarse))
    if near in {0, len(SEARCH) - 1}:
        raise InputError(_clock_not_found(SEARCH[near], error=coarse[near], file=file))
    shift, best = _lowest(closure, SEARCH[near] + FINE)
    found, at_rule = rule_min + shift, float(np.interp(0.0, SEARCH, coarse))
    off, poor = abs(shift) > SHIFT_TOLERANCE, best > POOR
    used = found if off and not (poor and best > 0.9 * at_rule) else rule_min
    stamp = Stamp(
        rule_min=rule_min,
        found_min=found,
        used_min=used,
        rmse_w_m2=best,
        rmse_unshifted_w_m2=float(np.interp(-rule_min, SEARCH, coarse)),
    )
    said = []
    if used != rule_min:
        said.append(
            f"time stamps: the format's rule says {rule_min:+.0f} min to mid-hour, closure of GHI, DNI and DHI finds "
            f"{found:+.1f} min (error {best:.1f} against {at_rule:.1f} W/m2): the shift found is used; "
            "check the file's clock and UTC offset"
        )
    if poor:
        said.append(
            f"GHI, DNI and DHI do not belong together: GHI misses DHI + DNI cos z by {best:.0f} W/m2 rms over the hours with "
            "beam, and no shift of the clock mends it; check which columns they are, and their units"
        )
    return stamp, "; ".join(said)


def _lowest(closure: Callable[[Floats], Floats], shifts: Floats) -> tuple[float, float]:
    """Shift of the least error, by a parabola through the best three, and the error at the best of them [W/m2]."""
    rmse = closure(shifts)
    best = int(np.clip(np.argmin(rmse), 1, len(rmse) - 2))
    before, here, after = rmse[best - 1 : best + 2] ** 2
    bend = before - 2.0 * here + after
    return float(shifts[best] + (0.5 * (before - after) / bend if bend > 0.0 else 0.0)), float(rmse[best])


def _clock_not_found(shift: float, *, error: float, file: str) -> Problem:
    return Problem(
        where=file,
        what="time stamps: closure of GHI, DNI and DHI finds no time of day that fits",
        got=f"the least error, {error:.0f} W/m2, at {shift:+.0f} min from the format's rule, where the search ends",
        allowed=f"within {SEARCH[-1]:.0f} min of the format's rule",
        do="mend the header's UTC offset or longitude, or give them under [place]; check which columns are GHI, DNI and DHI",
    )
