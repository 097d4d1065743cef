"""What measured points tell: a test report's coefficients, or parameters of the build, and how surely."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import Any, NamedTuple

import numpy as np
from scipy.constants import Stefan_Boltzmann, atm
from scipy.optimize import least_squares
from scipy.stats import t as student

from collector.balance.losses import Surroundings
from collector.balance.model import model_of
from collector.balance.steady import Feed, solve_running
from collector.build.collector import collector_of
from collector.build.parameters import parameter_of, with_values
from collector.build.points import Points
from collector.build.scenario import Scenario
from collector.study.year import wind_coefficient
from weather.errors import InputError, Problem
from weather.plane import PlaneIrradiance
from weather.year import Floats

__all__ = ["TERMS", "fit_build", "fit_report", "fitted_of"]

TERMS = {  # of the report, with what varies it
    "eta0": "sunlight",
    "a1_W_m2K": "temperature",
    "a2_W_m2K2": "temperature",
    "a3_J_m3K": "wind",
    "a4": "long wave",
    "a6_s_m": "wind",
    "b0": "incidence",
    "K_diffuse": "diffuse light",
}
TOLD = 1.0  # t-ratio below which a parameter of the build is not told at all
KNOWN = 3.0  # t-ratio that ISO 9806 asks of a term (from memory)
ALIKE = 0.98  # correlation from which two parameters are not told apart
CONFIDENCE = 0.95
FEWEST_LEVELS = 4  # of temperature; ISO 9806
LEAST_IRRADIANCE = 700.0  # W/m2; ISO 9806
OUTLIER = 3.5  # residuals over their standard deviation


class _Fitted(NamedTuple):
    values: Floats
    covariance: Floats
    residuals: Floats
    degrees: int


def fitted_of(
    scenario: Scenario, points: Points, *, terms: Sequence[str] | None, drop: bool, parameters: Sequence[str]
) -> dict[str, Any]:
    """Fit what was asked for: parameters of the build where some are named, else coefficients.

    Parameters
    ----------
    scenario
        The collector that was tested.
    points
        Of the test.
    terms, drop
        As for ``fit_report``.
    parameters
        Keys of the scenario's numbers.

    Returns
    -------
    dict
        As ``fit_report``.

    Raises
    ------
    InputError
        A term or a key that does not exist.
    """
    if unknown := [name for name in terms or () if name not in TERMS]:
        problem = Problem(where="--terms", what="unknown term", got=", ".join(unknown), allowed=", ".join(TERMS))
        raise InputError(problem)
    twice = sorted({name for names in (terms or (), parameters) for name in names if list(names).count(name) > 1})
    if twice:
        raise InputError(Problem(where="--terms, --parameter", what="asked for twice", got=", ".join(twice)))
    if not parameters:
        return fit_report(points, terms=terms, drop=drop) | {"title": scenario.title}
    known = [parameter_of(scenario, key) for key in parameters]
    return fit_build(
        points,
        start=[one.value for one in known],
        names=list(parameters),
        bounds=([one.low for one in known], [one.high for one in known]),
        scenario_of=lambda values: with_values(scenario, keys=parameters, values=values),
    ) | {"title": scenario.title}


def fit_report(points: Points, *, terms: Sequence[str] | None = None, drop: bool = False) -> dict[str, Any]:
    """Coefficients of ISO 9806 by weighted least squares.

    Parameters
    ----------
    points
        Of the test, per area of length x width.
    terms
        Names of ``TERMS``; None takes those that something in the points varies.
    drop
        Take out, one by one, the terms that the points can't support.

    Returns
    -------
    dict
        For each term its value (None where not supported), standard error, t-ratio and interval; correlations; residuals;
        what can't be told.

    Raises
    ------
    InputError
        Fewer points than terms.
    """
    names = list(terms) if terms else _varied(points)
    dropped: list[str] = []
    while True:
        fitted = _linear(points, names)
        weak = [name for name, ratio in zip(names, _ratios(fitted), strict=True) if ratio < KNOWN and name != "eta0"]
        if not drop or not weak or len(names) == 1:
            break
        ratios = dict(zip(names, _ratios(fitted), strict=True))
        worst = min(weak, key=lambda name: ratios[name])
        names.remove(worst)
        dropped.append(worst)
    return _result(points, fitted, names, kind="report") | {"dropped": dropped}


def fit_build(
    points: Points, *, start: Sequence[float], names: Sequence[str], bounds: tuple[Sequence[float], Sequence[float]],
    scenario_of: Callable[[Sequence[float]], Scenario],
) -> dict[str, Any]:  # fmt: skip
    """Parameters of the build, through the heat balance.

    Parameters
    ----------
    points
        Of the test.
    start, names, bounds
        Of the parameters, in the scenario's units.
    scenario_of
        A scenario with given values of them.

    Returns
    -------
    dict
        As ``fit_report``; intervals are those of the linearised model at the best fit.
    """
    _enough(points, names)
    weight = 1.0 / (points.sigma if points.sigma is not None else np.ones(len(points)))

    def missed(values: Floats) -> Floats:
        return (_powers(scenario_of([float(value) for value in values]), points) - points.power) * weight

    scale = np.maximum(np.abs(np.array(start)), 1e-3)
    found = least_squares(
        missed, np.array(start), bounds=bounds, x_scale=scale, diff_step=[1e-4] * len(names), xtol=1e-10, ftol=1e-12
    )
    degrees = len(points) - len(names)
    slopes = np.asarray(found.jac)
    covariance = np.linalg.pinv(slopes.T @ slopes, rcond=1e-12)
    if points.sigma is None:
        covariance = covariance * (found.fun @ found.fun) / max(degrees, 1)
    fitted = _Fitted(found.x, covariance, found.fun / weight, degrees)
    at_bound = [name for name, active in zip(names, found.active_mask, strict=True) if active]
    result = _result(points, fitted, list(names), kind="build")
    result["notices"] += [f"{name} ended at its bound: the points ask for more than is allowed" for name in at_bound]
    return result | {"dropped": []}


def _enough(points: Points, names: Sequence[str]) -> None:
    if len(points) <= len(names):
        what, got = "too few points", f"{len(points)} points for {len(names)} unknowns"
        raise InputError(
            Problem(where="points", what=what, got=got, allowed="more points than unknowns", do="fit fewer terms")
        )


def _varied(points: Points) -> list[str]:
    """Terms that something in the points varies."""
    names = ["eta0", "a1_W_m2K", "a2_W_m2K2"]
    if np.ptp(points.wind) > 1.5:
        names += ["a3_J_m3K", "a6_s_m"]
    if np.ptp(_longwave(points)) > 40.0:
        names.append("a4")
    if np.ptp(points.incidence_deg) > 15.0:
        names.append("b0")
    share = points.diffuse / np.maximum(points.irradiance, 1.0)
    return [*names, "K_diffuse"] if np.ptp(share) > 0.15 else names


def _longwave(points: Points) -> Floats:
    return np.asarray(Stefan_Boltzmann * (points.t_sky**4 - points.t_air**4))


def _columns(points: Points, names: Sequence[str]) -> Floats:
    """The report's form, linear in eta0, eta0 b0, eta0 K_diffuse and the loss terms."""
    beyond, above = points.wind - 3.0, points.above_air
    away = 1.0 / np.cos(np.radians(np.minimum(points.incidence_deg, 89.0))) - 1.0
    light = points.beam if "K_diffuse" in names else points.irradiance
    form = {
        "eta0": light,
        "a1_W_m2K": -above,
        "a2_W_m2K2": -(above**2),
        "a3_J_m3K": -beyond * above,
        "a4": _longwave(points),
        "a6_s_m": -beyond * points.irradiance,
        "b0": -points.beam * away,
        "K_diffuse": points.diffuse,
    }
    return np.array([form[name] for name in names]).T


def _linear(points: Points, names: Sequence[str]) -> _Fitted:
    _enough(points, names)
    weight = 1.0 / (points.sigma if points.sigma is not None else np.ones(len(points)))
    columns = _columns(points, names)
    size = np.linalg.norm(columns * weight[:, np.newaxis], axis=0)
    design = columns * weight[:, np.newaxis] / np.where(size > 0.0, size, 1.0)
    inverse = np.linalg.pinv(design.T @ design, rcond=1e-13, hermitian=True)
    values = inverse @ design.T @ (points.power * weight)
    residuals = design @ values - points.power * weight
    degrees = len(points) - len(names)
    covariance = inverse if points.sigma is not None else inverse * (residuals @ residuals) / degrees
    for direction in _blind(design):
        covariance = covariance + np.outer(direction, direction) * 1e12
    shrink = np.outer(1.0 / np.where(size > 0.0, size, 1e-12), 1.0 / np.where(size > 0.0, size, 1e-12))
    values, covariance = values / np.where(size > 0.0, size, 1.0), covariance * shrink
    values, covariance = _apart(values, covariance, names)
    return _Fitted(values, covariance, residuals / weight, degrees)


def _blind(design: Floats) -> list[Floats]:
    """Directions in which the points tell nothing at all."""
    _, sizes, directions = np.linalg.svd(design, full_matrices=False)
    return [direction for size, direction in zip(sizes, directions, strict=True) if size < 1e-6 * sizes[0]]


def _apart(values: Floats, covariance: Floats, names: Sequence[str]) -> tuple[Floats, Floats]:
    """From eta0 b0 and eta0 K_diffuse to b0 and K_diffuse, errors carried along."""
    turn, found = np.eye(len(names)), values.copy()
    first = names.index("eta0") if "eta0" in names else None
    for place, name in enumerate(names):
        if name in {"b0", "K_diffuse"} and first is not None:
            found[place] = values[place] / values[first]
            turn[place, place], turn[place, first] = 1.0 / values[first], -values[place] / values[first] ** 2
    return found, turn @ covariance @ turn.T


def _ratios(fitted: _Fitted) -> Floats:
    return np.abs(fitted.values) / np.maximum(np.sqrt(np.diag(fitted.covariance)), 1e-300)


def _powers(scenario: Scenario, points: Points) -> Floats:
    """Power of the build at each point's mean fluid temperature."""
    model = model_of(collector_of(scenario), pressure=atm)
    none = np.zeros(len(points))
    plane = PlaneIrradiance(
        beam=points.beam,
        sky=points.diffuse,
        horizon=none,
        ground=none,
        incidence_deg=points.incidence_deg,
        notices=(),
    )
    around = Surroundings(
        t_air=points.t_air,
        t_sky=points.t_sky,
        t_ground=points.t_air,
        h_wind=wind_coefficient(scenario, points.wind),
        wind=points.wind,
    )
    absorbed = model.absorbed(plane, around)
    useful = np.empty(len(points))
    for t_mean in np.unique(points.t_mean.round(2)):
        here = points.t_mean.round(2) == t_mean
        uptake = model.uptake(Feed(float(points.t_mean[here].mean()), at_inlet=False))
        useful[here] = solve_running(model.network, around.at(here), absorbed.at(here), uptake=uptake).useful
    return useful


def _result(points: Points, fitted: _Fitted, names: list[str], *, kind: str) -> dict[str, Any]:
    errors = np.sqrt(np.diag(fitted.covariance))
    span = float(student.ppf(0.5 + 0.5 * CONFIDENCE, max(fitted.degrees, 1)))
    ratios = _ratios(fitted)
    terms = [
        {
            "name": name,
            "value": float(value) if ratio >= (KNOWN if kind == "report" else TOLD) else None,
            "standard_error": float(error),
            "t_ratio": float(ratio),
            "low": float(value - span * error),
            "high": float(value + span * error),
            "supported": bool(ratio >= KNOWN),
        }
        for name, value, error, ratio in zip(names, fitted.values, errors, ratios, strict=True)
    ]
    correlation = fitted.covariance / np.outer(errors, errors)
    return {
        "kind": kind,
        "points": len(points),
        "terms": terms,
        "correlation": [[float(value) for value in row] for row in correlation],
        "confidence": CONFIDENCE,
        "rms_W_m2": float(np.sqrt(np.mean(fitted.residuals**2))),
        "residuals_W_m2": [float(value) for value in -fitted.residuals],
        "above_air_K": [float(value) for value in points.above_air],
        "cannot_tell": _cannot_tell(names, ratios, errors, correlation),
        "notices": [*points.notices, *_quality(points, fitted)],
        "cautions": [],
    }


def _cannot_tell(names: list[str], ratios: Floats, errors: Floats, correlation: Floats) -> list[str]:  # noqa: PLR0917 # rows of one table
    said = [
        f"{name}: the points do not support it (standard error {error:.3g}, t-ratio {ratio:.1f}, {KNOWN:g} is asked)"
        for name, ratio, error in zip(names, ratios, errors, strict=True)
        if ratio < KNOWN
    ]
    pairs = ((one, other) for one in range(len(names)) for other in range(one))
    return said + [
        f"{names[other]} and {names[one]} are not told apart (correlation {correlation[one, other]:+.3f})"
        for one, other in pairs
        if abs(correlation[one, other]) > ALIKE
    ]


def _quality(points: Points, fitted: _Fitted) -> list[str]:
    """What a laboratory would find wanting in the set."""
    levels = _levels(points.above_air)
    said = []
    if levels < FEWEST_LEVELS:
        count = "one level" if levels == 1 else f"{levels} levels"
        said.append(f"{count} of temperature; the standard asks for {FEWEST_LEVELS}, the first near the air's")
    if np.abs(points.above_air).min() > 5.0:
        said.append(
            f"no point within 5 K of the air (nearest {np.abs(points.above_air).min():.0f} K): eta0 is extrapolated"
        )
    dim = np.count_nonzero(points.irradiance < LEAST_IRRADIANCE)
    if dim:
        said.append(f"{dim} points below {LEAST_IRRADIANCE:g} W/m2, which the standard asks for")
    spread = float(np.std(fitted.residuals))
    wild = [points.lines[i] for i in np.flatnonzero(np.abs(fitted.residuals) > OUTLIER * max(spread, 1e-9))]
    if wild:
        said.append(f"far from the fit: line {', '.join(map(str, wild))} of the file")
    if points.sigma is None:
        said.append("no uncertainty_W_m2: equal weights, the size taken from the residuals")
    else:
        chi = float(np.sum((fitted.residuals / points.sigma) ** 2) / max(fitted.degrees, 1))
        if not 0.4 < chi < 2.5:
            said.append(
                f"residuals and the uncertainties given do not match (chi-squared a degree {chi:.2f}, 1 expected)"
            )
    return said


def _levels(above_air: Floats) -> int:
    """Levels of temperature: groups at least 5 K apart."""
    ordered = np.sort(above_air)
    return int(1 + np.count_nonzero(np.diff(ordered) > 5.0))
