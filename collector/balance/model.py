"""A collector ready to be solved, whether it is known by its build or by its test report."""

from __future__ import annotations

from dataclasses import dataclass

from collector.balance.capacity import held_heat
from collector.balance.losses import Network, Surroundings, network_of
from collector.balance.optics import Absorbed, absorbed_power, optics_of
from collector.balance.reported import (
    ReportedNetwork,
    ReportedUptake,
    absorbed_by_report,
    reported_network,
    reported_stream,
)
from collector.balance.steady import Feed, Stream, Uptake, stream_of
from collector.build.collector import Collector, ReportedCollector
from weather.plane import PlaneIrradiance

__all__ = ["Model", "model_of"]


@dataclass(frozen=True, kw_only=True)
class Model:
    """What the solvers need of a collector.

    Parameters
    ----------
    collector
        By its build or by its report.
    network, stream
        Its losses and its flow.
    capacity
        Heat held per kelvin, None where not known [J/m2K].
    """

    collector: Collector | ReportedCollector
    network: Network | ReportedNetwork
    stream: Stream
    capacity: float | None

    def absorbed(self, plane: PlaneIrradiance, around: Surroundings) -> Absorbed:
        """Return the power absorbed, n hours."""
        if isinstance(self.collector, ReportedCollector):
            return absorbed_by_report(self.collector, plane, around)
        return absorbed_power(optics_of(self.collector), plane)

    def uptake(self, feed: Feed, *, start_above: float = 0.0, stop_above: float = 0.0) -> Uptake:
        """Return the flow at a held temperature."""
        if isinstance(self.collector, ReportedCollector):
            return ReportedUptake(stream=self.stream, feed=feed, start_above=start_above, stop_above=stop_above)
        return Uptake(
            collector=self.collector, stream=self.stream, feed=feed, start_above=start_above, stop_above=stop_above
        )


def model_of(collector: Collector | ReportedCollector, *, pressure: float) -> Model:
    """Make a collector ready.

    Parameters
    ----------
    collector
        By its build or by its report.
    pressure
        Air pressure of the place [Pa].

    Returns
    -------
    Model
        Its heat capacity as given, or from the materials where all are known.
    """
    if isinstance(collector, ReportedCollector):
        return Model(
            collector=collector,
            network=reported_network(collector),
            stream=reported_stream(collector),
            capacity=collector.capacity,
        )
    network, capacity = network_of(collector, pressure=pressure), collector.capacity
    if capacity is None and (held := held_heat(collector, network)):
        capacity = held.total
    return Model(collector=collector, network=network, stream=stream_of(collector), capacity=capacity)
