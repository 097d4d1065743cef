"""Coatings against each other: the same collector in the same year, how sure the order is, and what it is worth."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from pathlib import Path
from typing import Any, NamedTuple

import numpy as np
from scipy.constants import zero_Celsius

from collector.build.candidates import Candidate
from collector.build.collector import Collector
from collector.build.scenario import Scenario
from collector.study.ageing import equivalent_hours, hours_by_temperature
from collector.study.asked import Asked
from collector.study.cautions import cautions_of
from collector.study.coated import Coated, coated, coated_year
from collector.study.notices import common_notices
from collector.study.plate import held_hours, running_plate
from collector.study.response import Plane, Response, fit_response
from collector.study.year import HeatYear, heat_years, open_scenario_weather, recoated
from weather.errors import InputError, Problem
from weather.year import Floats, WeatherYear

__all__ = ["Comparison", "compared", "study_coatings"]

MARGIN = 4.0  # standard uncertainties around the coatings that the plane holds
LEAST_MARGIN = {"absorptance": 0.01, "emittance": 0.01}
BOUNDS = {"absorptance": (0.05, 1.0), "emittance": (0.005, 1.0)}
INTERVAL = (2.5, 97.5)  # %
SHOWN = 41  # points of either axis of the plane, for a figure
INDEPENDENT = (
    "the uncertainty of each coating's two numbers counts as its own: what one laboratory does to all of them alike cancels, "
    "and the intervals are then too wide"
)


class Comparison(NamedTuple):
    """The account of a comparison, and heat over the plane for a figure: absorptance, emittance, heat ``(e, a)`` [kWh/m2]."""

    account: dict[str, Any]
    plane: tuple[Floats, Floats, Floats]

    @property
    def sound(self) -> bool:
        """Whether every hour of every year converged."""
        return not self.account["unconverged_hours"]


def study_coatings(scenario: Scenario, candidates: Sequence[Candidate], *, base: Path, asked: Asked) -> Comparison:
    """Compare coatings on a scenario's collector, in its year.

    Parameters
    ----------
    scenario
        Checked, with one temperature; its own coating is not used.
    candidates
        Two or more; differences are to the first.
    base
        Folder that its weather file's path counts from.
    asked
        What else is wanted.

    Returns
    -------
    Comparison
        In the candidates' order.

    Raises
    ------
    InputError
        Fewer than two coatings, several temperatures, or a collector known by its test report.
    """
    refuse_unfit(scenario, candidates)
    return compared(scenario, candidates, weather=open_scenario_weather(scenario, base=base), asked=asked)


def refuse_unfit(scenario: Scenario, candidates: Sequence[Candidate]) -> None:
    """Refuse what can't be compared.

    Parameters
    ----------
    scenario, candidates
        As for `study_coatings`.

    Raises
    ------
    InputError
        Fewer than two coatings, several temperatures, or a collector known by its test report.
    """
    if len(candidates) < 2:
        what, got = "nothing to compare with", f"{len(candidates)} coating"
        raise InputError(
            Problem(where="--coating", what=what, got=got, allowed="two or more", do="give --coating again")
        )
    if scenario.collector.absorber is None:
        what, do = "a collector known by its test report has no coating to change", "describe it by its build"
        raise InputError(Problem(where="collector.tested", what=what, do=do))
    means = scenario.operation.mean_C or ()
    if len(means) > 1:
        got, do = f"{len(means)} temperatures", f"choose one: --set operation.mean_C={means[0]:g}"
        raise InputError(Problem(where="operation.mean_C", what="coatings are compared at one", got=got, do=do))


def compared(scenario: Scenario, candidates: Sequence[Candidate], *, weather: WeatherYear, asked: Asked) -> Comparison:
    """Compare in a year that is read already.

    Parameters
    ----------
    scenario, candidates, asked
        As for `study_coatings`.
    weather
        The year.

    Returns
    -------
    Comparison
        In the candidates' order.
    """
    (base,) = heat_years(scenario, weather=weather)
    solved = [coated_year(base, candidate) for candidate in candidates]
    response = _response(base, solved, asked=asked)
    heats, clipped = _drawn(solved, response, asked=asked)
    rows = [_row(number, solved, heats, response=response, asked=asked) for number in range(len(solved))]
    aged = [] if asked.aged is None else _aged(base, solved, rows, changes=asked.aged)
    years = [*(one.year for one in solved), *aged]
    account = {
        "title": scenario.title,
        "inlet_C" if base.uptake.feed.at_inlet else "mean_C": round(base.uptake.feed.temperature - zero_Celsius, 9),
        "weather": {"place": weather.site.name, "file": weather.file},
        "area_m2": scenario.collector.modules * scenario.collector.length_m * scenario.collector.width_m,
        "asked": _asked(asked),
        "coatings": rows,
        "response": {"years": response.years, "error_kWh_m2": response.error, "draws_clipped": clipped},
        "residual_max_W_m2": max(float(max(one.hours.residual.max(), one.still.residual.max())) for one in solved),
        "unconverged_hours": _unconverged(years) + sum(int(np.count_nonzero(~one.still.converged)) for one in solved),
        "notices": _notices(scenario, solved, clipped=clipped, asked=asked),
        "cautions": _cautions(scenario, solved),
    }
    return Comparison(account, _shown(response))


def _response(base: HeatYear, solved: Sequence[Coated], *, asked: Asked) -> Response:
    """Heat over the plane around all coatings, each with one emittance at every temperature."""
    built = base.conditions.model.collector
    assert isinstance(built, Collector)  # noqa: S101 # a test report has been refused
    plane = Plane(
        _range("absorptance", [one.absorber.absorptance for one in solved], sigma=asked.sigma_alpha),
        _range("emittance", [one.emittance for one in solved], sigma=asked.sigma_eps),
        built.covers[-1].emittance if built.covers else 1.0,
    )

    def heat(absorptance: float, emittance: float) -> float:
        absorber = replace(built.absorber, absorptance=absorptance, emittance=emittance, radiating=None)
        return recoated(base, absorber=absorber).useful_kWh_m2

    known = [(one.absorber.absorptance, one.emittance, one.heat) for one in solved if one.candidate.radiating is None]
    return fit_response(heat, plane=plane, known=known)


def _range(name: str, values: Sequence[float], *, sigma: float) -> tuple[float, float]:
    margin, (low, high) = max(MARGIN * sigma, LEAST_MARGIN[name]), BOUNDS[name]
    return max(min(values) - margin, low), min(max(values) + margin, high)


def _drawn(solved: Sequence[Coated], response: Response, *, asked: Asked) -> tuple[Floats, int]:
    """Heat of every coating in every draw, ``(coatings, draws)``, and how many drawn numbers were held at a bound."""
    normal = np.random.default_rng(asked.seed).standard_normal((2, len(solved), asked.draws))
    given = np.array([[one.absorber.absorptance for one in solved], [one.emittance for one in solved]])[:, :, None]
    drawn = given + np.array([asked.sigma_alpha, asked.sigma_eps])[:, None, None] * normal
    lows, highs = np.array([response.plane.absorptance, response.plane.emittance]).T
    held = np.clip(drawn, lows[:, None, None], highs[:, None, None])
    heat = np.array([one.heat for one in solved])[:, None]
    moved = response(held[0], held[1]) - response(given[0], given[1])
    return heat + moved, int(np.count_nonzero(held != drawn))


def _row(number: int, solved: Sequence[Coated], heats: Floats, *, response: Response, asked: Asked) -> dict[str, Any]:
    one, first = solved[number], solved[0]
    difference, spread = one.heat - first.heat, heats[number] - heats[0]
    low, high = np.percentile(spread, INTERVAL)
    by_absorptance, by_emittance = response.slopes(one.absorber.absorptance, one.emittance)
    row = {
        "coating": number + 1,
        "name": one.candidate.name,
        "basis": one.candidate.basis,
        "absorptance": one.absorber.absorptance,
        "emittance": one.emittance,
        "emittance_at_C": one.at - zero_Celsius,
        "useful_kWh_m2": one.heat,
        "useful_interval_kWh_m2": [float(value) for value in np.percentile(heats[number], INTERVAL)],
        "rank": 1 + sum(other.heat > one.heat for other in solved),
        "difference_kWh_m2": difference,
        "interval_kWh_m2": [float(low), float(high)],
        "order_probability": _order(difference, spread) if number else None,
        "told_apart": bool(number and (low > 0.0 or high < 0.0)),
        "exchange": -by_emittance / by_absorptance if by_absorptance > 0.0 else None,
        "stagnation_plate_C": float(one.still.t_plate.max()) - zero_Celsius,
        "hours_above": int(np.count_nonzero(one.still.t_plate - zero_Celsius > asked.limit)),
        "hours_above_operated": int(np.count_nonzero(one.hours.t_plate - zero_Celsius > asked.limit)),
        "temperatures": hours_by_temperature(one.hours, one.still),
    }
    if asked.price is not None:
        worth = asked.price * asked.annuity
        row |= {"worth_per_m2": difference * worth, "worth_interval_per_m2": [float(low) * worth, float(high) * worth]}
    if asked.test_temperature is not None and asked.activation is not None:
        row["equivalent"] = equivalent_hours(
            one.hours, one.still, test_temperature=asked.test_temperature, activation=asked.activation
        )
    return row


def _order(difference: float, spread: Floats) -> float:
    """Share of the draws in which the difference has the sign it has; ties count half."""
    signs = np.sign(spread) * np.sign(difference)
    return float(0.5 + 0.5 * signs.mean())


def _aged(
    base: HeatYear, solved: Sequence[Coated], rows: Sequence[dict[str, Any]], *, changes: tuple[float, float]
) -> list[HeatYear]:
    """Each coating's year once aged, entered into its row."""
    years = []
    for one, row in zip(solved, rows, strict=True):
        aged = one.candidate.aged(d_absorptance=changes[0], d_emittance=changes[1])
        year = recoated(base, absorber=coated(base, aged))
        row["aged"] = {
            "absorptance": aged.absorptance,
            "emittance": one.emittance + changes[1],
            "useful_kWh_m2": year.useful_kWh_m2,
            "change_kWh_m2": year.useful_kWh_m2 - one.heat,
        }
        years.append(year)
    return years


def _asked(asked: Asked) -> dict[str, Any]:
    found = {name: list(value) if isinstance(value, tuple) else value for name, value in vars(asked).items()}
    criterion = asked.criterion
    found |= {"annuity": asked.annuity, "criterion": criterion, "criterion_limit": 0.05}
    return found | {"criterion_passed": None if criterion is None else criterion <= 0.05}


def _unconverged(years: Sequence[HeatYear]) -> int:
    """Hours of the years that did not converge."""
    solved = [year.running if year.drift is None else year.drift for year in years]
    return sum(int(np.count_nonzero(~one.converged)) for one in solved if one is not None)


def _notices(scenario: Scenario, solved: Sequence[Coated], *, clipped: int, asked: Asked) -> list[str]:
    about: dict[str, list[str]] = {}
    for number, one in enumerate(solved, start=1):
        for words in common_notices(one.year, scenario, hours=one.hours, still=one.still):
            about.setdefault(words, []).append(str(number))
    said = [
        words if len(numbers) == len(solved) else f"[{', '.join(numbers)}] {words}" for words, numbers in about.items()
    ]
    said.append(INDEPENDENT)
    for one in solved:
        held = held_hours(one.absorber, hours=one.hours, still=one.still)
        said += [*one.candidate.notices, *(f"{one.candidate.name}: {words}" for words in held)]
        if running_plate(one.hours) is None:
            said.append(f"{one.candidate.name}: no hour runs; its emittance is the one at 100 C")
    if clipped:
        whole = 2 * len(solved) * asked.draws
        said.append(
            f"{clipped} of {whole} drawn absorptances and emittances held at the ends of the ranges that were solved"
        )
    return list(dict.fromkeys(said))


def _cautions(scenario: Scenario, solved: Sequence[Coated]) -> list[str]:
    """Those of the coating that gets hottest."""
    hottest = max(solved, key=lambda one: float(one.still.t_plate.max()))
    return cautions_of(scenario, hours=hottest.hours, still=hottest.still)


def _shown(response: Response) -> tuple[Floats, Floats, Floats]:
    absorptance, emittance = (np.linspace(*bounds, SHOWN) for bounds in response.plane[:2])
    return absorptance, emittance, response(*np.meshgrid(absorptance, emittance))
