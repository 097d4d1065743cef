"""The plate's coating in a year's account: its two numbers where the year used them, and what must be said of them."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

import numpy as np
from scipy.constants import zero_Celsius

from collector.balance.operated import Operated
from collector.balance.steady import SteadyState
from collector.build.collector import Absorber, Collector
from collector.build.scenario import Scenario
from collector.build.surfaces import REFERENCE
from collector.physics.emittance_curve import EmittanceCurve
from collector.study.year import HeatYear
from weather.year import Floats

__all__ = ["coating_of", "emittance_at", "held_hours", "read_notices", "running_plate"]


def coating_of(year: HeatYear, scenario: Scenario, *, hours: Operated, still: SteadyState) -> dict[str, Any] | None:
    """Absorptance, and emittance at the running hours' mean plate temperature.

    Parameters
    ----------
    year
        Solved.
    scenario
        What it was solved for.
    hours, still
        As operated, and with the pump stopped.

    Returns
    -------
    dict or None
        None of a collector known by its test report. Where no hour runs the emittance is the one at 100 C.
    """
    collector = year.conditions.model.collector
    if not isinstance(collector, Collector) or scenario.collector.absorber is None:
        return None
    t_plate, surface = running_plate(hours), scenario.collector.absorber.surface
    absorber, at = collector.absorber, REFERENCE if t_plate is None else t_plate
    return {
        "name": surface.name if surface else scenario.collector.absorber.coating or "as given",
        "by_spectrum": surface is not None,
        "basis": surface.basis if surface else "one emittance at every temperature",
        "absorptance": absorber.absorptance,
        "emittance": emittance_at(absorber, at),
        "emittance_at_C": at - zero_Celsius,
        "notices": [*(surface.notices if surface else ()), *held_hours(absorber, hours=hours, still=still)],
    }


def read_notices(scenario: Scenario) -> tuple[str, ...]:
    """What the readers of a coating's files had to say.

    Parameters
    ----------
    scenario
        Checked.

    Returns
    -------
    tuple of str
        Empty where it names none.
    """
    absorber = scenario.collector.absorber
    return absorber.surface.notices if absorber and absorber.surface else ()


def running_plate(hours: Operated) -> float | None:
    """Mean plate temperature of the hours that run, each by its share.

    Parameters
    ----------
    hours
        As operated.

    Returns
    -------
    float or None
        None where none runs [K].
    """
    whole = float(hours.running.sum())
    return float(hours.t_plate @ hours.running) / whole if whole > 0.0 else None


def emittance_at(absorber: Absorber, t: float) -> float:
    """Emittance of a plate at one temperature.

    Parameters
    ----------
    absorber
        The plate.
    t
        Its temperature [K].

    Returns
    -------
    float
        The one it has where it has one for all.
    """
    return absorber.emittance if absorber.radiating is None else float(absorber.radiating(np.array([t]))[0][0])


def held_hours(absorber: Absorber, *, hours: Operated, still: SteadyState) -> list[str]:
    """Hours in which the plate leaves the table of its emittance.

    Parameters
    ----------
    absorber
        The plate.
    hours, still
        As operated, and with the pump stopped.

    Returns
    -------
    list of str
        One sentence each; none where all are within.
    """
    if absorber.radiating is None:
        return []
    cases = (("as operated", hours.t_plate), ("with the pump stopped", still.t_plate))
    return [said for name, t_plate in cases for said in _held(absorber.radiating, t_plate, name=name)]


def _held(radiating: EmittanceCurve, t_plate: Floats, *, name: str) -> Iterator[str]:
    count = int(np.count_nonzero(radiating.outside(t_plate)))
    if count:
        span = f"{radiating.t_least - zero_Celsius:.0f} to {radiating.t_most - zero_Celsius:.0f} C"
        yield f"plate outside {span} in {count} h {name}: emittance held at the end value"
