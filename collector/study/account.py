"""The year's account: where the sunlight went, month by month, what the numbers rest on, and whether they add up."""

from __future__ import annotations

from collections.abc import Iterable
from pathlib import Path
from typing import Any, NamedTuple

import numpy as np
from scipy.constants import zero_Celsius

from collector.balance.capacity import held_heat
from collector.balance.losses import Network
from collector.balance.model import Model
from collector.balance.operated import Operated
from collector.balance.optics import optics_of
from collector.balance.steady import SteadyState
from collector.build.collector import Collector
from collector.build.scenario import CHOICES, Scenario
from collector.study.cautions import cautions_of
from collector.study.notices import notices_of
from collector.study.obstructed import taken_by_obstacles
from collector.study.plate import coating_of, read_notices
from collector.study.sureness import Alternative, alternatives
from collector.study.year import (
    Conditions,
    HeatYear,
    conditions_of,
    heat_years,
    open_scenario_weather,
    standing,
    wind_at_collector,
)
from weather.gate import remarks_of
from weather.year import Floats, WeatherYear

__all__ = ["HOUR_COLUMNS", "Run", "hours_table", "inspected", "runs_of"]

HOTTEST = 5
CLOSED = 1e-6  # W/m2 of an hour, kWh/m2 of the year
HOUR_COLUMNS = (
    "time", "plane_W_m2", "absorbed_W_m2", "useful_W_m2", "top_convection_W_m2", "top_radiation_W_m2", "back_W_m2", "edge_W_m2",
    "idle_W_m2", "stored_W_m2", "running", "plate_C", "cover_C", "inlet_C", "mean_C", "outlet_C", "plate_if_stopped_C", "air_C",
    "sky_C", "wind_W_m2K", "residual_W_m2",
)  # fmt: skip


class Run(NamedTuple):
    """One scenario at one temperature: the year solved, its hours as operated and with the pump stopped, and the account."""

    year: HeatYear
    hours: Operated
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
    spreads = alternatives(scenario, weather=weather, base=years[0])
    still = standing(years[0].conditions)
    steady = heat_years(scenario, weather=weather, held=False) if years[0].drift else years
    runs = []
    for year, without, spread in zip(years, steady, spreads, strict=True):
        hours = year.operated(still)
        account = _account(year, scenario, hours=hours, still=still) | {
            "heat_held": _heat_held(year, without),
            "how_sure": _how_sure(year, spread),
        }
        runs.append(Run(year, hours, still, account))
    return runs


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
    conditions = conditions_of(scenario, weather=weather)
    model = conditions.model
    held = {key: getattr(scenario.operation, key) for key in ("inlet_C", "mean_C")}
    return {
        "title": scenario.title,
        **{key: value for key, value in held.items() if value is not None},
        "area_m2": scenario.collector.modules * model.collector.area,
        "by_report": scenario.collector.tested is not None,
        "normal_absorptance_plate": _at_normal(model),
        "U_back_W_m2K": model.network.u_back,
        "U_edge_W_m2K": model.network.u_edge,
        "heat_held": _capacity(model),
        "weather": _weather(weather, scenario),
        "models": _models(scenario),
        "obstacles": taken_by_obstacles(scenario, free=conditions.free, plane=conditions.plane),
        "notices": [*remarks_of(weather), *conditions.plane.notices, *read_notices(scenario)],
    }


def _at_normal(model: Model) -> float:
    """Share of beam at normal incidence that the plate takes up; of a test report, its peak efficiency."""
    if isinstance(model.collector, Collector):
        return float(optics_of(model.collector).beam(np.zeros(1))[0, 0])
    return model.collector.eta0


def _models(scenario: Scenario) -> dict[str, Any]:
    names = {step: getattr(scenario.models, step) for step in CHOICES}
    return names | {"sky_pressure_term": scenario.models.sky_pressure_term}


def _account(year: HeatYear, scenario: Scenario, *, hours: Operated, still: SteadyState) -> dict[str, Any]:
    feed = year.uptake.feed
    return {
        "title": scenario.title,
        "inlet_C" if feed.at_inlet else "mean_C": _tidy(feed.temperature - zero_Celsius),
        **_sums(year.conditions, hours),
        "obstacles": taken_by_obstacles(scenario, free=year.conditions.free, plane=year.conditions.plane),
        **_sizes(year, scenario),
        "hours_on": round(float(hours.running.sum())),
        "hottest_plate_C": float(hours.t_plate.max()) - zero_Celsius,
        "stagnation_plate_C": float(still.t_plate.max()) - zero_Celsius,
        "hottest_hours": _hottest(year.conditions, still),
        "residual_max_W_m2": float(max(hours.residual.max(), still.residual.max())),
        "unconverged_hours": int(np.count_nonzero(~hours.converged | ~still.converged)),
        "months": _months(year.conditions, hours),
        "weather": _weather(year.conditions.weather, scenario),
        "models": _models(scenario),
        "coating": coating_of(year, scenario, hours=hours, still=still),
        "notices": notices_of(year, scenario, hours=hours, still=still),
        "cautions": cautions_of(scenario, hours=hours, still=still),
    }


def _heat_held(year: HeatYear, without: HeatYear) -> dict[str, Any]:
    """What the collector holds, where that comes from, and what warming it up cost."""
    found = _capacity(year.conditions.model)
    if year.drift:
        found["warming_up_kWh_m2"] = without.useful_kWh_m2 - year.useful_kWh_m2
    return found


def _capacity(model: Model) -> dict[str, Any]:
    """Heat held per kelvin, and what it consists of where that is known."""
    found: dict[str, Any] = {"capacity_kJ_m2K": None, "from": "not known", "warming_up_kWh_m2": None}
    if model.capacity is None:
        return found
    found |= {"capacity_kJ_m2K": model.capacity / 1e3, "from": "the scenario"}
    if (
        isinstance(model.collector, Collector)
        and isinstance(model.network, Network)
        and model.collector.capacity is None
    ):
        parts = held_heat(model.collector, model.network)
        each = parts._asdict() if parts else {}
        found |= {"from": "the materials", **{f"{name}_kJ_m2K": value / 1e3 for name, value in each.items()}}
    return found


def _tidy(celsius: float) -> float:
    """Temperature as the user gave it, without the last bits of the way to kelvin and back."""
    return round(celsius, 9)


def _sums(conditions: Conditions, hours: Operated) -> dict[str, float]:
    """kWh/m2 of the year by where it went; the losses are those while the pump runs, idle is what is lost while it stands."""
    plane, taken = float(conditions.plane.total.sum()) / 1e3, float(conditions.absorbed.plate.sum()) / 1e3
    paths = {
        "useful_kWh_m2": hours.useful,
        "top_convection_kWh_m2": hours.losses.convection,
        "top_radiation_kWh_m2": hours.losses.radiation,
        "back_kWh_m2": hours.losses.back,
        "edge_kWh_m2": hours.losses.edge,
        "idle_kWh_m2": hours.idle,
        "stored_kWh_m2": hours.stored,
    }
    gone = {key: float(values.sum()) / 1e3 for key, values in paths.items()}
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


def _months(conditions: Conditions, hours: Operated) -> list[dict[str, float]]:
    columns = {
        "plane_kWh_m2": conditions.plane.total,
        "absorbed_kWh_m2": conditions.absorbed.plate,
        "useful_kWh_m2": hours.useful,
        "hours_on": hours.running * 1e3,
    }
    month = conditions.weather.month
    sums = {key: np.bincount(month, weights=values, minlength=13) / 1e3 for key, values in columns.items()}
    return [{"month": number} | {key: float(values[number]) for key, values in sums.items()} for number in range(1, 13)]


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
        "step_min": weather.step_min,
        "radiation_made": weather.made,
        "findings": [vars(each) for each in weather.findings],
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
    conditions, hours, still, feed = run.year.conditions, run.hours, run.still, run.year.uptake.feed
    held = feed.temperature if feed.at_inlet else 2.0 * hours.t_mean - hours.t_outlet
    inlet = np.where(hours.on, held, hours.t_plate)
    temperatures = (hours.t_plate, hours.nodes[0], inlet, hours.t_mean, hours.t_outlet, still.t_plate)
    values = (
        conditions.plane.total, conditions.absorbed.plate, hours.useful, hours.losses.convection, hours.losses.radiation,
        hours.losses.back, hours.losses.edge, hours.idle, hours.stored, hours.running,
        *(t - zero_Celsius for t in (*temperatures, conditions.around.t_air, conditions.around.t_sky)),
        conditions.around.h_wind, hours.residual,
    )  # fmt: skip
    times = [str(time)[:16] for time in _local(conditions.weather)]
    return {"time": times, **dict(zip(HOUR_COLUMNS[1:], values, strict=True))}
