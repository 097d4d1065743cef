"""A collector known by its test report, in the words of the solvers: one node at the mean fluid temperature."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from collector.balance.losses import Facing, Losses, Step, Surroundings
from collector.balance.optics import Absorbed
from collector.balance.steady import Coupling, Flow, Stream, Uptake, fluid_table
from collector.build.collector import ReportedCollector
from collector.physics.radiation import SIGMA, sky_view_factor
from weather.plane import PlaneIrradiance
from weather.year import Floats

__all__ = ["ReportedNetwork", "ReportedUptake", "absorbed_by_report", "diffuse_modifier", "reported_stream"]

WIND_OF_THE_TEST = 3.0  # m/s, from which ISO 9806 counts the wind
TIGHT = 1e5  # W/m2K, between the node and a held mean: the node is the mean within 0.01 K


@dataclass(frozen=True, kw_only=True)
class ReportedNetwork:
    """Losses of ISO 9806:2017 between the mean fluid and the surroundings.

    Parameters
    ----------
    collector
        Its coefficients.
    sky_share
        Share of the front's view that is sky.
    """

    collector: ReportedCollector
    sky_share: float
    gaps: tuple[()] = ()
    u_back: float = 0.0
    u_edge: float = 0.0

    def facing(self, around: Surroundings) -> Facing:
        """Return the loss per kelvin in each hour's wind, and under ``radiant`` what long wave takes [W/m2]."""
        report, above = self.collector, _wind_above(around)
        arriving = SIGMA * (self.sky_share * around.t_sky**4 + (1.0 - self.sky_share) * around.t_ground**4)
        missing = SIGMA * around.t_air**4 - arriving
        linear = report.a1 + report.a3 * above
        return Facing(t_air=around.t_air, h_wind=linear, radiant=(report.a4 - report.a7 * above) * missing)

    def step(self, facing: Facing, *, sun_on_covers: Floats, nodes: Floats) -> Step:
        """Return the loss and its slope at a mean fluid temperature; a report has no covers and no paths."""
        del sun_on_covers
        a2, a8 = self.collector.a2, self.collector.a8
        above = nodes[-1] - facing.t_air
        loss = facing.h_wind * above + a2 * above**2 + a8 * above**4 + facing.radiant
        slope = np.maximum(facing.h_wind + 2.0 * a2 * above + 4.0 * a8 * above**3, 0.1 * facing.h_wind)
        none = np.zeros_like(loss)
        losses = Losses(loss, none, none, none, np.zeros((0, loss.size)))
        return Step(losses, loss, slope, slope, [], [])


@dataclass(frozen=True, kw_only=True)
class ReportedUptake(Uptake):
    """The flow of a collector whose node is the mean fluid itself: its rise is straight from inlet to outlet."""

    def coupling(self, slope: Floats, *, flow: Flow) -> Coupling:
        """Conductance from the mean to the inlet, twice the flow's heat capacity; or to a held mean, tight."""
        ones = np.ones_like(slope)
        conductance = 2.0 * flow.capacity_rate * ones if self.feed.at_inlet else TIGHT * ones
        return Coupling(conductance, ones, ones, np.zeros_like(slope))


def reported_stream(collector: ReportedCollector) -> Stream:
    """Heat capacity of the flow over temperature; the film is in the report's coefficients already.

    Parameters
    ----------
    collector
        Its fluid and flow.

    Returns
    -------
    Stream
        Reynolds number 0: not known.
    """
    t, fluid = fluid_table(collector.fluid, mass_fraction=collector.mass_fraction)
    return Stream(
        t=t, h_film=np.ones_like(t), capacity_rate=collector.flow * fluid.heat_capacity, reynolds=np.zeros_like(t)
    )


def absorbed_by_report(collector: ReportedCollector, plane: PlaneIrradiance, around: Surroundings) -> Absorbed:
    """Gain of the fluid at air temperature: eta0 (K_b G_b + K_d G_d) - a6 u' G.

    Parameters
    ----------
    collector
        Its coefficients.
    plane, around
        Irradiance by component, and the wind, n hours.

    Returns
    -------
    Absorbed
        ``(n,)``; no covers.
    """
    beam = np.interp(plane.incidence_deg, collector.beam_angles_deg, collector.beam_modifiers)
    diffuse = diffuse_modifier(collector)
    gain = collector.eta0 * (beam * plane.beam + diffuse * (plane.sky + plane.horizon + plane.ground))
    gain = gain - collector.a6 * _wind_above(around) * plane.total
    return Absorbed(plate=np.maximum(gain, 0.0), covers=np.zeros((0, gain.size)))


def diffuse_modifier(collector: ReportedCollector) -> float:
    """The report's diffuse modifier, or the beam's integrated over the hemisphere.

    Parameters
    ----------
    collector
        Its modifiers.

    Returns
    -------
    float
        Of all light that is not beam.
    """
    if collector.diffuse_modifier is not None:
        return collector.diffuse_modifier
    theta = (np.arange(900) + 0.5) / 10.0
    weight = np.sin(np.radians(theta)) * np.cos(np.radians(theta))
    modifier = np.interp(theta, collector.beam_angles_deg, collector.beam_modifiers)
    return float((modifier * weight).sum() / weight.sum())


def reported_network(collector: ReportedCollector) -> ReportedNetwork:
    """Losses of a report, as mounted.

    Parameters
    ----------
    collector
        Its coefficients and tilt.

    Returns
    -------
    ReportedNetwork
        With the sky's share of the view.
    """
    return ReportedNetwork(
        collector=collector,
        sky_share=collector.sky_open * (1.0 if collector.whole_sky else sky_view_factor(collector.tilt_deg)),
    )


def _wind_above(around: Surroundings) -> Floats:
    """Wind beyond the test's 3 m/s [m/s]."""
    assert around.wind is not None  # noqa: S101 # every study knows the wind at the collector
    return around.wind - WIND_OF_THE_TEST
