"""The year's account: where the sunlight went, month by month, what the numbers rest on, and whether they add up."""

from __future__ import annotations

from collections.abc import Iterable
from pathlib import Path
from typing import Any, NamedTuple

import numpy as np
from scipy.constants import zero_Celsius

from collector.balance.optics import optics_of
from collector.balance.steady import SteadyState
from collector.build.collector import collector_of
from collector.build.scenario import CHOICES, Scenario
from collector.study.cautions import cautions_of
from collector.study.notices import notices_of
from collector.study.sureness import Alternative, alternatives
from collector.study.year import Conditions, HeatYear, heat_years, open_scenario_weather, standing, wind_at_collector
from weather.year import Floats, WeatherYear

__all__ = ["HOUR_COLUMNS", "Run", "hours_table", "inspected", "runs_of"]

HOTTEST = 5
CLOSED = 1e-6  # W/m2 of an hour, kWh/m2 of the year
HOUR_COLUMNS = (
    "time", "plane_W_m2", "absorbed_W_m2", "useful_W_m2", "top_convection_W_m2", "top_radiation_W_m2", "back_W_m2",
    "edge_W_m2", "running", "plate_C", "cover_C", "inlet_C", "mean_C", "outlet_C", "plate_if_stopped_C", "air_C", "sky_C",
    "wind_W_m2K", "residual_W_m2",
)  # fmt: skip


class Run(NamedTuple):
    """One scenario at one temperature: the year solved, every hour with the pump stopped, and the account in plain numbers."""

    year: HeatYear
    still: SteadyState
    account: dict[str, Any]

    @property
    def sound(self) -> bool:
        """Whether every hour converged and the sums close."""
        return not self.account["unconverged_hours"] and abs(self.account["unaccounted_kWh_m2"]) < CLOSED


def runs_of(scenario: Scenario, *, base: Path) -> list[Run]:
    """A scenario's years with their accounts.

    Parameters
    ----------
    scenario
        Checked.
    base
        Folder that its weather file's path counts from.

    Returns
    -------
    list of Run
        One a temperature.
    """
    weather = open_scenario_weather(scenario, base=base)
    years = heat_years(scenario, weather=weather)
    spreads = alternatives(scenario, weather=weather)
    still = standing(years[0].conditions)
    return [
        Run(year, still, _account(year, scenario, still=still, spread=spread))
        for year, spread in zip(years, spreads, strict=True)
    ]


def inspected(scenario: Scenario, *, base: Path) -> dict[str, Any]:
    """What a scenario comes to before it is solved.

    Parameters
    ----------
    scenario
        Checked.
    base
        Folder that its weather file's path counts from.

    Returns
    -------
    dict
        Its weather, its collector at normal incidence, and what the weather reader had to say.
    """
    weather = open_scenario_weather(scenario, base=base)
    collector = collector_of(scenario)
    plate, *covers = optics_of(collector).beam(np.zeros(1))[:, 0].tolist()
    held = {key: getattr(scenario.operation, key) for key in ("inlet_C", "mean_C")}
    return {
        "title": scenario.title,
        **{key: value for key, value in held.items() if value is not None},
        "area_m2": scenario.collector.modules * collector.area,
        "normal_absorptance_plate": plate,
        "normal_absorptance_covers": covers,
        "U_back_W_m2K": collector.u_back,
        "U_edge_W_m2K": collector.u_edge,
        "weather": _weather(weather, scenario),
        "models": _models(scenario),
        "notices": list(weather.notices),
    }


def _models(scenario: Scenario) -> dict[str, Any]:
    names = {step: getattr(scenario.models, step) for step in CHOICES}
    return names | {"sky_pressure_term": scenario.models.sky_pressure_term}


def _account(
    year: HeatYear, scenario: Scenario, *, still: SteadyState, spread: Iterable[Alternative]
) -> dict[str, Any]:
    hours = still.replaced(year.on, year.running)
    return {
        "title": scenario.title,
        "inlet_C" if year.feed.at_inlet else "mean_C": _tidy(year.feed.temperature - zero_Celsius),
        **_sums(year),
        **_sizes(year, scenario),
        "hours_on": int(np.count_nonzero(year.on)),
        "hottest_plate_C": float(hours.t_plate.max()) - zero_Celsius,
        "stagnation_plate_C": float(still.t_plate.max()) - zero_Celsius,
        "hottest_hours": _hottest(year.conditions, still),
        "residual_max_W_m2": float(max(hours.residual.max(), still.residual.max())),
        "unconverged_hours": int(np.count_nonzero(~hours.converged | ~still.converged)),
        "months": _months(year),
        "how_sure": _how_sure(year, spread),
        "weather": _weather(year.conditions.weather, scenario),
        "models": _models(scenario),
        "notices": notices_of(year, scenario, still=still),
        "cautions": cautions_of(year, scenario, still=still),
    }


def _tidy(celsius: float) -> float:
    """Temperature as the user gave it, without the last bits of the way to kelvin and back."""
    return round(celsius, 9)


def _sums(year: HeatYear) -> dict[str, float]:
    """kWh/m2 of the year by where it went; the losses are those of the running hours, idle is what standing hours absorb."""
    running, absorbed = year.running, year.conditions.absorbed.plate
    plane, taken = float(year.conditions.plane.total.sum()) / 1e3, float(absorbed.sum()) / 1e3
    paths = {
        "useful_kWh_m2": running.useful,
        "top_convection_kWh_m2": running.losses.convection,
        "top_radiation_kWh_m2": running.losses.radiation,
        "back_kWh_m2": running.losses.back,
        "edge_kWh_m2": running.losses.edge,
        "idle_kWh_m2": absorbed[~year.on],
    }
    gone = {key: float(values.sum()) / 1e3 for key, values in paths.items()} | {"stored_kWh_m2": 0.0}
    return {
        "plane_kWh_m2": plane,
        "optical_kWh_m2": plane - taken,
        "absorbed_kWh_m2": taken,
        **gone,
        "unaccounted_kWh_m2": taken - sum(gone.values()),
    }


def _sizes(year: HeatYear, scenario: Scenario) -> dict[str, float]:
    table = scenario.collector
    area = table.length_m * table.width_m
    sizes = {"area_m2": table.modules * area, "useful_kWh": year.useful_kWh_m2 * table.modules * area}
    if table.gross_area_m2 is not None:
        sizes["gross_area_m2"] = table.modules * table.gross_area_m2
        sizes["useful_kWh_m2_gross"] = year.useful_kWh_m2 * area / table.gross_area_m2
    return sizes


def _months(year: HeatYear) -> list[dict[str, float]]:
    month, useful = year.conditions.weather.month, np.zeros(len(year.on))
    useful[year.on] = year.running.useful
    columns = {
        "plane_kWh_m2": year.conditions.plane.total,
        "absorbed_kWh_m2": year.conditions.absorbed.plate,
        "useful_kWh_m2": useful,
        "hours_on": year.on * 1e3,
    }
    sums = {key: np.bincount(month, weights=values, minlength=13) / 1e3 for key, values in columns.items()}
    return [
        {"month": number}
        | {key: float(values[number]) for key, values in sums.items() if key != "hours_on"}
        | {"hours_on": round(sums["hours_on"][number])}
        for number in range(1, 13)
    ]


def _hottest(conditions: Conditions, still: SteadyState) -> list[dict[str, Any]]:
    """The hours in which the plate is hottest when the pump stands still."""
    t_plate, weather = still.t_plate, conditions.weather
    local = _local(weather)
    return [
        {
            "time": str(local[hour])[5:16].replace("T", " "),
            "plate_C": float(t_plate[hour]) - zero_Celsius,
            "plane_W_m2": float(conditions.plane.total[hour]),
            "air_C": float(weather.t_air[hour]) - zero_Celsius,
            "wind_m_s": float(weather.wind[hour]),
        }
        for hour in np.argsort(-t_plate, kind="stable")[:HOTTEST]
    ]


def _local(weather: WeatherYear) -> Any:
    """Middle of each hour in local standard time."""
    return weather.time_mid + np.timedelta64(round(weather.site.utc_offset_h * 3600), "s")


def _how_sure(year: HeatYear, spread: Iterable[Alternative]) -> list[dict[str, Any]]:
    base = year.useful_kWh_m2
    return [
        {
            "changed": row.changed,
            "to": row.to,
            "useful_kWh_m2": row.useful,
            "change_pct": 100.0 * (row.useful / base - 1.0) if base > 0.0 else None,
            "bound": row.bound,
        }
        for row in spread
    ]


def _weather(weather: WeatherYear, scenario: Scenario) -> dict[str, Any]:
    site, stamp = weather.site, weather.stamp
    wind, words = wind_at_collector(scenario, weather.wind)
    return {
        "file": weather.file,
        "format": weather.format,
        "place": site.name,
        "latitude_deg": site.latitude_deg,
        "longitude_deg": site.longitude_deg,
        "altitude_m": site.altitude_m,
        "utc_offset_h": site.utc_offset_h,
        "hours": len(weather),
        "source_years": list(weather.source_years),
        "stamp_rule_min": stamp.rule_min,
        "stamp_found_min": stamp.found_min,
        "stamp_used_min": stamp.used_min,
        "stamp_error_W_m2": stamp.rmse_w_m2,
        "stamp_error_unshifted_W_m2": stamp.rmse_unshifted_w_m2,
        "ghi_kWh_m2": float(weather.ghi.sum()) / 1e3,
        "dni_kWh_m2": float(weather.dni.sum()) / 1e3,
        "dhi_kWh_m2": float(weather.dhi.sum()) / 1e3,
        "air_mean_C": float(weather.t_air.mean()) - zero_Celsius,
        "wind": words,
        "wind_mean_m_s": float(wind.mean()),
        "albedo": scenario.place.albedo,
        "pressure_Pa": weather.pressure,
    }


def hours_table(run: Run) -> dict[str, Floats | list[str]]:
    """Every hour of a run in columns.

    Parameters
    ----------
    run
        Solved.

    Returns
    -------
    dict
        ``HOUR_COLUMNS``, each of the year's length; ``time`` is the middle of the hour in local standard time, ``cover_C`` the
        outermost cover's (the plate's own without a cover), and fluid temperatures of standing hours are the plate's.
    """
    year, still = run.year, run.still
    conditions, hours = year.conditions, still.replaced(year.on, year.running)
    inlet = 2.0 * hours.t_mean - hours.t_outlet
    if year.feed.at_inlet:
        inlet = np.where(year.on, year.feed.temperature, hours.t_plate)
    temperatures = (hours.t_plate, hours.nodes[0], inlet, hours.t_mean, hours.t_outlet, still.t_plate)
    values = (
        conditions.plane.total, conditions.absorbed.plate, hours.useful, hours.losses.convection, hours.losses.radiation,
        hours.losses.back, hours.losses.edge, year.on.astype(float),
        *(t - zero_Celsius for t in (*temperatures, conditions.around.t_air, conditions.around.t_sky)),
        conditions.around.h_wind, hours.residual,
    )  # fmt: skip
    times = [str(time)[:16] for time in _local(conditions.weather)]
    return {"time": times, **dict(zip(HOUR_COLUMNS[1:], values, strict=True))}
