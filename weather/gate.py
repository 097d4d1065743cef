"""What may go into a year's heat: one year, and no grave finding that the user has not accepted."""

from __future__ import annotations

import difflib
from collections.abc import Sequence

from weather.errors import InputError, Problem
from weather.findings import stopping
from weather.year import WeatherYear

__all__ = ["ACCEPTABLE", "remarks_of", "usable"]

ACCEPTABLE = (  # findings that stop, and that a year can be computed in spite of
    "swapped-columns",
    "hemisphere",
    "temperature-unit",
    "wind-unit",
    "irradiance-unit",
    "impossible",
    "dew-above-air",
    "closure",
)
SAID = ("clock", "closure")  # the search for the time stamps has its own sentence on these


def usable(weather: WeatherYear, *, accept: Sequence[str] = ()) -> WeatherYear:
    """The weather itself, if a year's heat may rest on it.

    Parameters
    ----------
    weather
        As read.
    accept
        Names of findings that the user accepts.

    Returns
    -------
    WeatherYear
        The same.

    Raises
    ------
    InputError
        It holds several years, or a grave finding that is not accepted; or a name to accept is none.
    """
    problems = [_unknown(name) for name in accept if name not in ACCEPTABLE]
    if weather.years > 1:
        problems.append(_several(weather))
    problems += [each.problem(file=weather.file) for each in stopping(weather.findings, accept=tuple(accept))]
    if problems:
        raise InputError(problems)
    return weather


def remarks_of(weather: WeatherYear) -> list[str]:
    """Everything that a result must say of its weather: what was mended, and what the checks found worth a look.

    Parameters
    ----------
    weather
        As read.

    Returns
    -------
    list of str
        A sentence each.
    """
    found = [each.sentence for each in weather.findings if each.severity != "note" and each.name not in SAID]
    return [*weather.notices, *found]


def _unknown(name: str) -> Problem:
    close = difflib.get_close_matches(name, ACCEPTABLE, n=1)
    do = f"did you mean {close[0]}?" if close else ""
    return Problem(where="--accept", what="no such finding", got=repr(name), allowed=", ".join(ACCEPTABLE), do=do)


def _several(weather: WeatherYear) -> Problem:
    years = weather.source_years
    return Problem(
        where=weather.file,
        what=f"weather file holds {weather.years} years",
        got=f"{years[0]} to {years[-1]}, {len(weather)} h",
        allowed="one year at a time",
        do=f"choose one with place.year, such as --set place.year={years[0]}",
    )
