"""A scenario's obstacles: what they are, and what they take of the year's sunlight."""

from __future__ import annotations

from typing import Any

from collector.build.scenario import Scenario
from weather.obstacles import Obstacles
from weather.plane import PlaneIrradiance
from weather.rows import Rows

__all__ = ["obstacles_of", "taken_by_obstacles"]


def obstacles_of(scenario: Scenario) -> Obstacles | None:
    """What stands before a scenario's collectors.

    Parameters
    ----------
    scenario
        Checked.

    Returns
    -------
    Obstacles or None
        None where it names neither a horizon nor rows.
    """
    mounting = scenario.mounting
    if mounting.horizon is None and mounting.rows is None:
        return None
    table = mounting.rows
    rows = None
    if table is not None:
        rows = Rows(
            distance=table.row_distance_m,
            height=table.row_height_m,
            count=table.row_count,
            ground_deg=table.slope_of_ground_deg,
        )
    return Obstacles(tilt_deg=mounting.tilt_deg, azimuth_deg=mounting.azimuth_deg, horizon=mounting.horizon, rows=rows)


def taken_by_obstacles(
    scenario: Scenario, *, free: PlaneIrradiance | None, plane: PlaneIrradiance
) -> dict[str, Any] | None:
    """Sunlight that does not arrive for the obstacles.

    Parameters
    ----------
    scenario
        Checked.
    free, plane
        Sunlight on the plane without and with the obstacles, n hours.

    Returns
    -------
    dict or None
        The year's sums, and what is left of the views; None without obstacles.
    """
    obstacles = obstacles_of(scenario)
    if obstacles is None or free is None:
        return None
    beam = float((free.beam - plane.beam).sum()) / 1e3
    return {
        "beam_kWh_m2": beam,
        "diffuse_kWh_m2": float((free.total - plane.total).sum()) / 1e3 - beam,
        "sky_open": obstacles.sky_open,
        "ground_open": obstacles.ground_open,
        "horizon": scenario.mounting.horizon_csv,
        "rows": None if scenario.mounting.rows is None else scenario.mounting.rows.row_count,
    }
