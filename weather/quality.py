"""Checks of a weather year, each one a few lines: what is impossible, what is stuck, what was read in the wrong unit."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from dataclasses import replace

import numpy as np

from weather.axis import runs
from weather.checks import POOR
from weather.closure import BEAM, RADIATION
from weather.evidence import Evidence
from weather.findings import Finding, Severity
from weather.limits import POSSIBLE, RARE, beyond, beyond_longwave, disagreeing
from weather.units import unit_findings
from weather.year import Floats, Mask, Stamp

__all__ = ["CHECKS", "findings_of"]


NIGHT = 97.0  # deg of zenith angle at mid-hour, from which no part of the hour sees the sun or much twilight
LIT_NIGHT, DARK_NIGHT = 10.0, -1.0  # W/m2
FAINT = 20.0  # W/m2, above which one value for hours is no overcast sky
STUCK = {"sun": 6, "wind": 48, "t_air": 24}  # h of one value, beyond which a sensor is stuck
JUMP = {"t_air": 12.0, "wind": 20.0}  # K and m/s from one hour to the next
RISE = 1.05  # K of the dew point above the air; whole degrees may stand 1 K apart
HIGH_SUN = 0.17  # cosine of the zenith angle, below which an hour's mean is no instant's value
UNMOVED = 0.9  # share of one wind speed in the year
FEW = 12  # leaps a year: a typical year has a seam each month
MANY = 0.01  # share of sunlit hours beyond what is possible, that stops
OFTEN = 0.10  # share of hours whose components disagree, that warns
FOLLOWING = ("closure", "irradiance-unit", "impossible", "hemisphere")
RANK = {"stop": 0, "warn": 1, "note": 2}


def findings_of(evidence: Evidence, *, suspected: Sequence[Finding], stamp: Stamp) -> tuple[Finding, ...]:
    """Everything the checks find, the gravest first.

    Parameters
    ----------
    evidence
        Of a file.
    suspected
        Other readings of the file that fit far better; they stand first.
    stamp
        The time-stamp convention found, with the error of GHI against DHI + DNI cos z.

    Returns
    -------
    tuple of Finding
        Empty if all is well; each name once.
    """
    found = [*_clock(evidence, stamp), *(each for check in CHECKS for each in check(evidence))]
    if suspected:  # what else is grave about the sunlight follows from it
        found = [replace(each, severity="warn") if each.name in FOLLOWING else each for each in found]
    found = [*suspected, *found]
    once = {each.name: each for each in reversed(found)}
    kept = [each for each in found if once[each.name] is each]
    return tuple(sorted(kept, key=lambda each: RANK[each.severity]))


def _clock(e: Evidence, stamp: Stamp) -> Iterator[Finding]:
    """A clock that is off, and columns that no clock makes fit."""
    lit = e.columns["dni"] > BEAM
    if stamp.used_min != stamp.rule_min:
        off = stamp.used_min - stamp.rule_min
        what = f"the clock is {off:+.0f} min from what the format's rule says; put right by closure"
        yield from e.finding("clock", lit, severity="warn", what=what, do="check the file's stamps and its UTC offset")
    if stamp.rmse_w_m2 is not None and stamp.rmse_w_m2 > POOR:
        what = f"GHI misses DHI + DNI cos z by {stamp.rmse_w_m2:.0f} W/m2 rms, and no shift of the clock mends it"
        do = "check which columns are GHI, DNI and DHI, and their units"
        yield from e.finding("closure", lit, severity="stop", what=what, do=do)


def _count(mask: Floats | Mask) -> float:
    """Return how many hours are not zero; hardly more than none where there are none, so that it divides."""
    return float(np.count_nonzero(mask)) or 1e-9


def impossible(e: Evidence) -> Iterator[Finding]:
    """Irradiance and long wave beyond the physically possible."""
    masks = {}
    for name in RADIATION:
        if (values := e.read(name)) is not None:
            masks[name] = beyond(values, limit=POSSIBLE[name], cosine=e.cosine, dni_extra=e.sun.dni_extra)
    yield from _limits(e, masks, name="impossible", words="above what is physically possible")
    longwave, t_air = e.read("longwave"), e.read("t_air")
    if longwave is not None and t_air is not None:
        mask = beyond_longwave(longwave, t_air=t_air)
        what = "the sky's long wave does not fit the air's temperature, or is out of 40 to 700 W/m2"
        yield from e.finding("longwave", mask, severity="warn", what=what, do="do not use models.sky = 'measured'")


def rare(e: Evidence) -> Iterator[Finding]:
    """Irradiance that is extremely rare."""
    masks = {}
    high = e.cosine > HIGH_SUN
    for name in RADIATION:
        if (values := e.read(name)) is not None:
            possible = ~beyond(values, limit=POSSIBLE[name], cosine=e.cosine, dni_extra=e.sun.dni_extra)
            masks[name] = high & possible & beyond(values, limit=RARE[name], cosine=e.cosine, dni_extra=e.sun.dni_extra)
    yield from _limits(e, masks, name="rare", words="in a range that is extremely rare")


def _limits(e: Evidence, masks: dict[str, Mask], *, name: str, words: str) -> list[Finding]:
    whole = np.zeros(len(e.stamps), dtype=bool)
    for mask in masks.values():
        whole |= mask
    each = ", ".join(f"{key.upper()} {np.count_nonzero(mask)} h" for key, mask in masks.items() if mask.any())
    many = np.count_nonzero(whole) > MANY * _count(e.cosine)
    if name == "rare":
        do = "clouds' edges and snow can do that; look at those hours if they are many"
        return e.finding(name, whole, severity="warn" if many else "note", what=f"{each} {words}", do=do)
    do = "look at those hours; check columns, units and clock"
    return e.finding(name, whole, severity="stop" if many else "warn", what=f"{each} {words}", do=do)


def components(e: Evidence) -> Iterator[Finding]:
    """Hours in which GHI and DHI + DNI cos z disagree."""
    read = [e.read(name) for name in RADIATION]
    if any(values is None for values in read):
        return
    ghi, dni, dhi = (np.asarray(values) for values in read)
    off, told = disagreeing(ghi=ghi, dni=dni, dhi=dhi, zenith_deg=e.sun.apparent_zenith_deg)
    share = _count(off) / _count(told)
    what = f"GHI and DHI + DNI cos z disagree by more than 8 % (15 % with a low sun) in {100 * share:.1f} % of the hours compared"
    do = "a few are usual in measured and typical years; many point to an instrument, a clock or a column"
    yield from e.finding("components", off, severity="warn" if share > OFTEN else "note", what=what, do=do)


def above_clear(e: Evidence) -> Iterator[Finding]:
    """Hours brighter than a clean sky without cloud."""
    ghi = e.read("ghi")
    if ghi is None:
        return
    high = e.cosine > 0.2
    mask = high & (ghi > 1.1 * e.clear + 20.0)
    share = _count(mask) / _count(high)
    what = f"GHI more than 10 % above a clean, clear sky in {100 * share:.1f} % of the hours with the sun above 12 deg"
    do = "a few are clouds' edges; many point to the place's altitude, a unit or an instrument"
    yield from e.finding("above-clear-sky", mask, severity="warn" if share > 0.05 else "note", what=what, do=do)


def night(e: Evidence) -> Iterator[Finding]:
    """Light at night, and values below zero."""
    dark = e.sun.apparent_zenith_deg > NIGHT
    bright, below = np.zeros(len(dark), dtype=bool), np.zeros(len(dark), dtype=bool)
    lowest = 0.0
    for name in RADIATION:
        if (values := e.read(name)) is not None:
            bright |= dark & (values > LIT_NIGHT)
            below |= values < DARK_NIGHT
            lowest = min(lowest, float(np.nanmin(values, initial=0.0)))
    do = "check the clock, the UTC offset and the place"
    what = f"sunlight above {LIT_NIGHT:g} W/m2 while the sun is 7 deg and more below the horizon"
    yield from e.finding("light-at-night", bright, severity="warn", what=what, do=do)
    what = f"irradiance below zero, down to {lowest:.1f} W/m2; taken as 0"
    do = "an instrument's zero offset: take it off the day's values too"
    yield from e.finding("negative-night", below, severity="warn", what=what, do=do)


def stuck(e: Evidence) -> Iterator[Finding]:
    """One value for too long: radiation by day, air temperature, wind."""
    for name in RADIATION:
        if (values := e.read(name)) is not None:
            mask = _same(np.where((values > FAINT) & (e.cosine > 0.0), values, np.nan), longest=STUCK["sun"])
            what = f"{name.upper()} keeps one value for more than {STUCK['sun']} h by day"
            yield from e.finding(f"stuck-{name}", mask, severity="warn", what=what, do="a stuck sensor or filled rows")
    for name, words in (("t_air", "air temperature"), ("wind", "wind")):
        values = e.read(name)
        if values is not None and not _unmoved(values):
            mask = _same(values, longest=STUCK[name])
            what = f"{words} keeps one value for more than {STUCK[name]} h"
            yield from e.finding(
                f"stuck-{name.partition('_')[2] or name}",
                mask,
                severity="warn",
                what=what,
                do="a stuck sensor or filled rows",
            )


def _same(values: Floats, *, longest: int) -> Mask:
    """Hours in runs of one value that are longer than that."""
    mask = np.zeros(len(values), dtype=bool)
    for first, steps in runs(np.diff(values) == 0.0):
        if steps + 1 > longest:
            mask[first : first + steps + 1] = True
    return mask


def _unmoved(wind: Floats) -> bool:
    known = wind[np.isfinite(wind)]
    _, counts = np.unique(known, return_counts=True)
    return bool(known.size) and counts.max() > UNMOVED * known.size


def still_wind(e: Evidence) -> Iterator[Finding]:
    """Wind that never moves."""
    wind = e.read("wind")
    if wind is not None and _unmoved(wind):
        common, counts = np.unique(wind[np.isfinite(wind)], return_counts=True)
        value = common[np.argmax(counts)]
        what = f"wind stands at {value:g} m/s in {100 * counts.max() / counts.sum():.0f} % of the year"
        do = "losses through the front rest on it: give measured wind, or mounting.wind_factor for another mean"
        yield from e.finding("still-wind", wind == value, severity="warn", what=what, do=do)


def jumps(e: Evidence) -> Iterator[Finding]:
    """Air temperature or wind that leaps from one hour to the next."""
    for name, unit, words in (("t_air", "K", "air temperature"), ("wind", "m/s", "wind")):
        values = e.read(name)
        if values is None:
            continue
        leap = np.abs(np.diff(values, prepend=values[:1]))
        what = f"{words} changes by more than {JUMP[name]:g} {unit} from one hour to the next (up to {np.nanmax(leap):.1f})"
        mask = leap > JUMP[name]
        severity: Severity = "warn" if np.count_nonzero(mask) > FEW else "note"
        yield from e.finding(f"jump-{words.split()[0]}", mask, severity=severity, what=what, do="look at those hours")


def damp(e: Evidence) -> Iterator[Finding]:
    """Dew point above the air's temperature."""
    t_dew, t_air = e.read("t_dew"), e.read("t_air")
    if t_dew is None or t_air is None:
        return
    above = t_dew - t_air
    mask = above > RISE
    many = np.count_nonzero(mask) > 0.05 * len(mask)
    what = f"dew point above the air's temperature, by up to {np.nanmax(above, initial=0.0):.1f} K"
    do = "check the two columns; the sky's temperature rests on the dew point"
    yield from e.finding("dew-above-air", mask, severity="stop" if many else "warn", what=what, do=do)


def doubled_day(e: Evidence) -> Iterator[Finding]:
    """A day whose rows are those of the day before."""
    rows = [values for name in ("ghi", "t_air", "wind") if (values := e.read(name)) is not None]
    if len(rows) < 2:
        return
    days = np.concatenate([values[: len(values) // 24 * 24].reshape(-1, 24) for values in rows], axis=1)
    again = np.zeros(len(days), dtype=bool)
    again[1:] = (days[1:] == days[:-1]).all(axis=1)
    mask = np.zeros(len(e.stamps), dtype=bool)
    mask[: len(again) * 24] = np.repeat(again, 24)
    what = f"{np.count_nonzero(again)} days repeat the day before in every hour"
    yield from e.finding("doubled-day", mask, severity="warn", what=what, do="rows were filled or pasted twice")


CHECKS: tuple[Callable[[Evidence], Iterator[Finding]], ...] = (
    unit_findings,
    impossible,
    rare,
    components,
    above_clear,
    night,
    stuck,
    still_wind,
    jumps,
    damp,
    doubled_day,
)
