"""One coating's year on a collector, in the same sun and air as the others."""

from __future__ import annotations

from dataclasses import replace
from typing import NamedTuple

from collector.balance.operated import Operated
from collector.balance.steady import SteadyState
from collector.build.candidates import Candidate
from collector.build.collector import Absorber, Collector
from collector.build.surfaces import REFERENCE
from collector.study.plate import emittance_at, running_plate
from collector.study.year import HeatYear, recoated, standing

__all__ = ["Coated", "coated", "coated_year"]


class Coated(NamedTuple):
    """A coating, its year, hours as operated and with the pump stopped; its emittance, and at which temperature [K]."""

    candidate: Candidate
    absorber: Absorber
    year: HeatYear
    hours: Operated
    still: SteadyState
    at: float
    emittance: float

    @property
    def heat(self) -> float:
        """Of the year [kWh/m2]."""
        return self.year.useful_kWh_m2


def coated_year(base: HeatYear, candidate: Candidate) -> Coated:
    """Solve a coating's year.

    Parameters
    ----------
    base
        A year of a collector known by its build.
    candidate
        The coating.

    Returns
    -------
    Coated
        Its emittance is the one at the running hours' mean plate temperature, or at 100 C where no hour runs.
    """
    absorber = coated(base, candidate)
    year = recoated(base, absorber=absorber)
    still = standing(year.conditions)
    hours = year.operated(still)
    t_plate = running_plate(hours)
    at = REFERENCE if t_plate is None else t_plate
    return Coated(candidate, absorber, year, hours, still, at, emittance_at(absorber, at))


def coated(base: HeatYear, candidate: Candidate) -> Absorber:
    """Put a coating on a collector's plate.

    Parameters
    ----------
    base
        A year of a collector known by its build.
    candidate
        The coating.

    Returns
    -------
    Absorber
        The plate otherwise as it was.
    """
    built = base.conditions.model.collector
    assert isinstance(built, Collector)  # noqa: S101 # the callers refuse a test report
    return replace(
        built.absorber,
        absorptance=candidate.absorptance,
        emittance=candidate.emittance,
        radiating=candidate.radiating,
    )
