"""A year's hours as the pump had them, whichever way they were solved."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from collector.balance.losses import Losses
from collector.balance.steady import SteadyState
from weather.year import Floats, Mask

__all__ = ["Operated", "operated_steadily"]


@dataclass(frozen=True, kw_only=True)
class Operated:
    """Hours as operated, each ``(n,)``; fluxes are means over the hour.

    Parameters
    ----------
    nodes
        Covers from the outside in and then the plate, means over the hour, ``(covers + 1, n)`` [K].
    t_end
        Plate temperature at the hour's end [K].
    useful
        Heat taken away by the fluid [W/m2].
    running
        Share of the hour in which the pump runs.
    losses
        Leaving the plate while the pump runs [W/m2].
    idle
        Lost while it stands still [W/m2].
    stored
        Taken up by the collector itself [W/m2].
    t_mean, t_outlet
        Fluid, while the pump runs [K]; the plate's own in hours without.
    residual
        Imbalance of the hour, covers included [W/m2].
    converged
        Whether the hour is solved.
    """

    nodes: Floats
    t_end: Floats
    useful: Floats
    running: Floats
    losses: Losses
    idle: Floats
    stored: Floats
    t_mean: Floats
    t_outlet: Floats
    residual: Floats
    converged: Mask

    @property
    def t_plate(self) -> Floats:
        """Mean plate temperature, ``(n,)`` [K]."""
        return np.asarray(self.nodes[-1])

    @property
    def on(self) -> Mask:
        """Hours in which the pump runs, if only for a part."""
        return self.running > 0.0


def operated_steadily(still: SteadyState, running: SteadyState, on: Mask) -> Operated:
    """Hours without heat held: each either runs or stands.

    Parameters
    ----------
    still
        All n hours with the pump stopped.
    running, on
        The hours that run, and which they are.

    Returns
    -------
    Operated
        n hours.
    """
    hours = still.replaced(on, running)

    def while_running(path: Floats) -> Floats:
        return np.where(on, path, 0.0)

    losses = hours.losses
    return Operated(
        nodes=hours.nodes,
        t_end=hours.t_plate,
        useful=while_running(hours.useful),
        running=on.astype(float),
        losses=Losses(
            while_running(losses.convection),
            while_running(losses.radiation),
            while_running(losses.back),
            while_running(losses.edge),
            np.zeros((0, on.size)),
        ),
        idle=np.where(on, 0.0, losses.total),
        stored=np.zeros(on.size),
        t_mean=hours.t_mean,
        t_outlet=hours.t_outlet,
        residual=hours.residual,
        converged=hours.converged,
    )
