"""What a result must say of itself: hours filled, out of a relation's range, or not solved."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np
from scipy.constants import zero_Celsius

from collector.balance.losses import Network, gap_rayleigh
from collector.balance.operated import Operated
from collector.balance.reported import diffuse_modifier
from collector.balance.steady import SteadyState, Stream
from collector.build.collector import ReportedCollector
from collector.build.scenario import Scenario
from collector.physics.convection import WIND_RELATIONS
from collector.physics.fluids import valid_range
from collector.study.plate import coating_of
from collector.study.point import BY_REPORT
from collector.study.year import HeatYear, wind_at_collector
from weather.gate import remarks_of
from weather.sky import DEW_POINT_RANGE, NEEDS
from weather.year import Floats, Mask

__all__ = ["common_notices", "notices_of"]

HIGHEST_RAYLEIGH = 1e5  # Hollands et al. 1976
LEAST_ASPECT = 12.0  # Hollands et al. 1976
TRANSITION = (2300.0, 10_000.0)  # Reynolds numbers between laminar and turbulent tube flow


def notices_of(year: HeatYear, scenario: Scenario, *, hours: Operated, still: SteadyState) -> list[str]:
    """Everything that was filled, clipped, mended, out of range or not converged, a sentence each.

    Parameters
    ----------
    year
        Solved.
    scenario
        What it was solved for.
    hours
        As operated.
    still
        Every hour with the pump stopped.

    Returns
    -------
    list of str
        Each with its count; empty if there is nothing to say.
    """
    found = coating_of(year, scenario, hours=hours, still=still)
    return common_notices(year, scenario, hours=hours, still=still) + (found["notices"] if found else [])


def common_notices(year: HeatYear, scenario: Scenario, *, hours: Operated, still: SteadyState) -> list[str]:
    """The same without what is said of the plate's coating.

    Parameters
    ----------
    year, scenario, hours, still
        As for `notices_of`.

    Returns
    -------
    list of str
        Each with its count.
    """
    return [
        *remarks_of(year.conditions.weather),
        *year.conditions.plane.notices,
        *_unsolved(hours, still),
        *_fluid(hours, scenario),
        *_film(hours, year.uptake.stream),
        *_wind(year, scenario, on=hours.on),
        *_sky(year, scenario, on=hours.on),
        *_gaps(year, hours),
        *_report(year, hours),
        *_pump(year, hours, scenario),
    ]


def _unsolved(hours: Operated, still: SteadyState) -> Iterator[str]:
    for name, converged in (("as operated", hours.converged), ("with the pump stopped", still.converged)):
        open_hours = np.count_nonzero(~converged)
        if open_hours:
            yield f"{open_hours} h did not converge {name}: their numbers are not to be trusted"


def _fluid(hours: Operated, scenario: Scenario) -> Iterator[str]:
    fluid = scenario.fluid
    low, high = valid_range(fluid.name, mass_fraction=fluid.mass_fraction)
    t_mean = hours.t_mean[hours.on]
    outside = np.count_nonzero((t_mean < low) | (t_mean > high))
    if outside:
        span = f"{low - zero_Celsius:.0f} to {high - zero_Celsius:.0f} C"
        yield f"{fluid.name}: {outside} running h outside the data's {span}, held at its end"


def _film(hours: Operated, stream: Stream) -> Iterator[str]:
    reynolds = np.interp(hours.t_mean[hours.on], stream.t, stream.reynolds)
    between = np.count_nonzero((reynolds > TRANSITION[0]) & (reynolds < TRANSITION[1]))
    if between:
        lowest, highest = reynolds.min(), reynolds.max()
        yield (
            f"tube flow between laminar and turbulent in {between} running h (Re {lowest:.0f} to {highest:.0f}): "
            "film interpolated"
        )


def _wind(year: HeatYear, scenario: Scenario, *, on: Mask) -> Iterator[str]:
    if scenario.collector.tested is not None:
        return
    limit = WIND_RELATIONS[scenario.models.wind].limit
    wind, _ = wind_at_collector(scenario, year.conditions.weather.wind)
    above = wind[on] > limit
    if above.any():
        yield (
            f"wind relation '{scenario.models.wind}' was found up to {limit:g} m/s: {np.count_nonzero(above)} running h "
            f"are above (to {wind[on].max():.1f} m/s), extrapolated"
        )


def _sky(year: HeatYear, scenario: Scenario, *, on: Mask) -> Iterator[str]:
    t_dew, report = year.conditions.weather.t_dew, scenario.collector.tested
    if report is not None and not (report.a4 or report.a7_J_m3K4):
        return
    if t_dew is None or "t_dew" not in NEEDS.get(scenario.models.sky, ()):
        return
    low, high = DEW_POINT_RANGE
    outside = np.count_nonzero((t_dew[on] < low) | (t_dew[on] > high))
    if outside:
        span = f"{low - zero_Celsius:.0f} to {high - zero_Celsius:.0f} C"
        yield f"sky relation '{scenario.models.sky}': {outside} running h with a dew point outside {span}, extrapolated"


def _gaps(year: HeatYear, hours: Operated) -> Iterator[str]:
    network = year.conditions.model.network
    if not isinstance(network, Network):
        return
    rows: list[Floats] = gap_rayleigh(network, nodes=hours.nodes[:, hours.on])
    for number, (gap, rayleigh) in enumerate(zip(network.gaps, rows, strict=True), start=1):
        above = np.count_nonzero(rayleigh > HIGHEST_RAYLEIGH)
        if above:
            yield f"gap {number}: {above} running h with a Rayleigh number above 1e5, extrapolated"
        if gap.aspect < LEAST_ASPECT:
            yield f"gap {number}: length over thickness {gap.aspect:.1f}, relation found from {LEAST_ASPECT:.0f}: extrapolated"


def _report(year: HeatYear, hours: Operated) -> Iterator[str]:
    report = year.conditions.model.collector
    if not isinstance(report, ReportedCollector):
        return
    yield BY_REPORT
    above = hours.t_mean[hours.on] - year.conditions.around.t_air[hours.on]
    if report.tested_to is None:
        farthest = above.max(initial=0.0)
        yield f"the scenario does not say how far the report was tested (tested_to_K); running hours go to {farthest:.0f} K"
    elif (above > report.tested_to).any():
        beyond = np.count_nonzero(above > report.tested_to)
        yield f"{beyond} running h beyond the tested {report.tested_to:g} K above the air (to {above.max():.0f} K), extrapolated"
    normal = float(np.interp(0.0, report.beam_angles_deg, report.beam_modifiers))
    if abs(normal - 1.0) > 0.02:
        yield f"the report's K_beam at normal incidence is {normal:.3f} and not 1: eta0 counts that much less"
    if report.diffuse_modifier is None:
        yield f"no K_diffuse in the report: {diffuse_modifier(report):.3f}, the beam's integrated over the hemisphere"


def _pump(year: HeatYear, hours: Operated, scenario: Scenario) -> Iterator[str]:
    if scenario.operation.start_K:
        yield "running hours include, as whole, those in which the pump starts and stops again and again"
    dark = hours.on & (year.conditions.absorbed.plate == 0.0)
    if dark.any():
        heat = float(hours.useful[dark].sum()) / 1e3
        yield f"{np.count_nonzero(dark)} running h without sun draw {heat:.1f} kWh/m2 from the air; condensation is not modelled"
