"""What ages a coating: the year's hours by plate temperature, and the test hours that stand for them."""

from __future__ import annotations

import numpy as np
from scipy.constants import zero_Celsius

from collector.balance.operated import Operated
from collector.balance.steady import SteadyState
from collector.physics.blackbody import arrhenius_1889
from weather.year import Floats

__all__ = ["equivalent_hours", "hours_by_temperature"]

BIN = 20.0  # K


def hours_by_temperature(hours: Operated, still: SteadyState) -> list[dict[str, float]]:
    """Hours of the year by plate temperature.

    Parameters
    ----------
    hours, still
        As operated, and with the pump stopped all year.

    Returns
    -------
    list of dict
        Bins of 20 K from the coldest to the hottest: running, standing in between, and had the pump never run.
    """
    operated, stopped = hours.t_plate - zero_Celsius, still.t_plate - zero_Celsius
    low = np.floor(min(operated.min(), stopped.min()) / BIN) * BIN
    high = np.ceil(max(operated.max(), stopped.max()) / BIN) * BIN
    edges = np.arange(low, max(high, low + BIN) + 0.5 * BIN, BIN)
    columns = {
        "running_h": _binned(operated, hours.running, edges),
        "standing_h": _binned(operated, 1.0 - hours.running, edges),
        "never_run_h": _binned(stopped, np.ones_like(stopped), edges),
    }
    return [
        {
            "from_C": float(edges[row]),
            "to_C": float(edges[row + 1]),
            **{key: float(c[row]) for key, c in columns.items()},
        }
        for row in range(edges.size - 1)
    ]


def _binned(celsius: Floats, weight: Floats, edges: Floats) -> Floats:
    return np.histogram(celsius, bins=edges, weights=weight)[0]


def equivalent_hours(
    hours: Operated, still: SteadyState, *, test_temperature: float, activation: float
) -> dict[str, float]:
    """Hours at a test's temperature that age as much as the year does.

    Parameters
    ----------
    hours, still
        As operated, and with the pump stopped all year.
    test_temperature
        [C]
    activation
        [kJ/mol]

    Returns
    -------
    dict
        As operated, and had the pump never run [h a year].
    """

    def at(t_plate: Floats) -> float:
        return float(
            arrhenius_1889(t_plate, reference=test_temperature + zero_Celsius, activation=1e3 * activation).sum()
        )

    return {"operated_h": at(hours.t_plate), "never_run_h": at(still.t_plate)}
