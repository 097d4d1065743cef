"""Heat held: the whole year's solution against a stiff integrator on an independent scalar solution, and its limits."""

from __future__ import annotations

from dataclasses import replace
from itertools import pairwise
from pathlib import Path

import numpy as np
import pytest
from scipy.integrate import solve_ivp

from collector.balance.capacity import held_heat
from collector.balance.losses import network_of
from collector.balance.steady import Feed, operate
from collector.balance.transient import solve_drift
from collector.build.reading import read_scenario
from collector.study.year import HeatYear, heat_years, open_scenario_weather, standing
from tests import oracle
from tests.builds import collector
from tests.test_against_oracle import scalar_fluid

SCENARIO = Path(__file__).parents[1] / "scenarios" / "laundry.toml"
CAPACITY = 9000.0  # J/m2K, a flat plate of the usual range 5 to 10 kJ/m2K (from memory)
BUILD = {  # the laundry's module in the words of the scalar solution
    "length": 2.0, "width": 1.1, "absorptance": 0.95, "emittance_plate": 0.05, "k_plate": 385.0, "delta": 0.0002,
    "pitch": 0.1, "d_outer": 0.01, "d_inner": 0.009, "bond": None, "angle_model": "constant", "tilt_deg": 40.0,
    "covers": [{"n": 1.526, "kl": 0.0128, "emittance": 0.88, "gap": 0.025}],
    "back": {"thickness": 0.05, "conductivity": 0.04}, "edge": {"thickness": 0.02, "conductivity": 0.04, "height": 0.08},
    "flow": 0.02, "fluid": scalar_fluid("water", 0.0),
}  # fmt: skip


@pytest.fixture(scope="module")
def year() -> HeatYear:
    scenario = read_scenario(SCENARIO)
    (solved,) = heat_years(scenario, weather=open_scenario_weather(scenario, base=SCENARIO.parent), held=False)
    return solved


def drift_of(year: HeatYear, *, capacity=CAPACITY, **changes):
    conditions, uptake = year.conditions, replace(year.uptake, **changes)
    return solve_drift(
        conditions.model.network, conditions.around, conditions.absorbed, capacity=capacity, uptake=uptake
    )


@pytest.fixture(scope="module")
def drift(year):
    return drift_of(year)


def slope_of(year: HeatYear, hour: int):
    """Rate of change of the plate's temperature in an hour, K/s, by the scalar solution."""
    around, absorbed = year.conditions.around, year.conditions.absorbed
    condition = {name: float(getattr(around, name)[hour]) for name in ("t_air", "t_sky", "t_ground", "h_wind")}
    condition |= {"pressure": year.conditions.model.network.pressure, "longwave_view": "tilted"}
    suns, sun, feed = [float(absorbed.covers[0][hour])], float(absorbed.plate[hour]), year.uptake.feed.temperature

    def rate(_, state):
        t = float(state[0])
        if t <= feed:
            gain = sun - sum(oracle.loss(BUILD, condition, suns, t)[:3])
        else:
            loss, u, _ = oracle.loss_line(BUILD, condition, suns, t)
            t_fluid = 0.5 * (t + feed)
            f_r = oracle.removal_factor(
                u, oracle.efficiency_factor(BUILD, u, oracle.film(BUILD, t_fluid)), BUILD["flow"] * BUILD["fluid"](t_fluid)[0]
            )  # fmt: skip
            gain = sun - loss - f_r * u / (1.0 - f_r) * (t - feed)
        return [gain / CAPACITY, t / 3600.0]

    return rate


def weeks(year: HeatYear) -> dict[str, int]:
    """First hours of the clearest, the most broken and the coldest week."""
    weather, starts = year.conditions.weather, np.arange(168, 8500, 24)
    hops = np.abs(np.diff(weather.dni, prepend=0.0)) * (weather.dhi > 50.0)
    over = {
        "clear": [weather.dni[s : s + 168].sum() for s in starts],
        "broken cloud": [hops[s : s + 168].sum() * (weather.dni[s : s + 168].sum() < 3e4) for s in starts],
        "cold": [-weather.t_air[s : s + 168].mean() for s in starts],
    }
    return {name: int(starts[np.argmax(values)]) for name, values in over.items()}


@pytest.mark.parametrize("week", ["clear", "broken cloud", "cold"])
def test_a_week_against_a_stiff_integrator(year, drift, week):
    """Radau, 1e-8, each hour from the integrator's own end of the hour before; pump on by day and off by night."""
    first = weeks(year)[week]
    t, ends, means = float(drift.t_end[first - 1]), [], []
    for hour in range(first, first + 168):
        solved = solve_ivp(slope_of(year, hour), (0.0, 3600.0), [t, 0.0], method="Radau", rtol=1e-8, atol=1e-8)
        t = float(solved.y[0, -1])
        ends.append(t)
        means.append(float(solved.y[1, -1]))
    here = slice(first, first + 168)
    assert drift.running[here].sum() > 20.0
    assert drift.running[here].sum() < 100.0
    for ours, theirs in ((drift.t_end[here], ends), (drift.t_plate[here], means)):
        assert np.sqrt(np.mean((ours - np.array(theirs)) ** 2)) < 0.05


def test_every_hour_closes_with_what_is_stored(year, drift):
    absorbed = year.conditions.absorbed.plate
    out = drift.useful + drift.losses.total + drift.idle + drift.stored
    assert np.abs(absorbed - out).max() < 1e-6
    assert drift.converged.all()
    assert drift.stored.sum() == pytest.approx(0.0, abs=1e-6)  # the year begins as it ends


def test_hardly_any_capacity_is_the_steady_year(year):
    light = drift_of(year, capacity=200.0)
    assert light.useful.sum() / 1e3 == pytest.approx(year.useful_kWh_m2, rel=3e-4)
    whole = light.running > 0.999
    steady = year.operated(standing(year.conditions))
    assert light.t_plate[whole] == pytest.approx(steady.t_plate[whole], abs=0.2)


def test_more_capacity_never_gives_more_heat(year):
    heat = [drift_of(year, capacity=capacity).useful.sum() for capacity in (2e3, 4e3, 8e3, 16e3, 32e3, 64e3)]
    assert all(later < earlier for earlier, later in pairwise(heat))


def test_what_warming_up_costs_is_of_the_size_that_a_march_in_time_gives(year):
    """Selective single cover, mean 25 to 75 C: 0.5 to 2 % at 9 kJ/m2K and 3 to 6 % at 20, by a march in small steps of time."""
    for capacity, low, high in ((9e3, 0.5, 2.0), (20e3, 2.0, 6.0)):
        cost = 100.0 * (1.0 - drift_of(year, capacity=capacity).useful.sum() / 1e3 / year.useful_kWh_m2)
        assert low < cost < high


def test_endless_flow_is_a_fixed_mean_temperature(year):
    """With the flow's heat capacity beyond bounds inlet and mean are one; F_R becomes F'."""
    conditions = year.conditions
    fast = replace(year.uptake.stream, capacity_rate=year.uptake.stream.capacity_rate * 1e6)
    at_inlet = replace(year.uptake, stream=fast)
    at_mean = replace(year.uptake, stream=fast, feed=Feed(year.uptake.feed.temperature, at_inlet=False))
    heat = [
        operate(conditions.model.network, conditions.around, conditions.absorbed, uptake=uptake)[0].useful.sum()
        for uptake in (at_inlet, at_mean)
    ]
    assert heat[0] == pytest.approx(heat[1], rel=1e-4)


def test_pump_that_starts_later_never_gives_more(year):
    heat = [drift_of(year, start_above=start, stop_above=stop).useful.sum() for start, stop in ((0, 0), (3, 1), (8, 2))]
    assert heat[0] > heat[1] > heat[2]


def test_a_plate_at_night_cools_below_the_air_as_it_does_without_heat_held(year, drift):
    night = (year.conditions.absorbed.plate == 0.0) & np.roll(year.conditions.absorbed.plate == 0.0, 5)
    still = standing(year.conditions)
    assert np.abs(drift.t_end[night] - still.t_plate[night]).mean() < 1.0


def test_heat_held_by_materials_is_the_textbooks_sum():
    """Plate 0.2 mm of copper with tubes, water in them, and a 3.2 mm pane that follows by the ratio of loss coefficients."""
    from collector.build.collector import Materials

    built = collector(materials=Materials(plate=3.44e6, covers=(6000.0,), back=2500.0, edge=0.0))
    held = held_heat(built, network_of(built, pressure=101_325.0))
    assert held is not None
    assert held.plate == pytest.approx(3.44e6 * (0.0002 + np.pi / 4 * (0.01**2 - 0.009**2) / 0.1))
    assert held.fluid == pytest.approx(4.13e6 * np.pi / 4 * 0.009**2 / 0.1, rel=0.01)
    assert 0.1 < held.covers / 6000.0 < 0.35  # 0.27 for one cover in Duffie & Beckman, Table 6.12.1 (from memory)
    assert held.insulation == 1250.0
    assert held_heat(collector(), network_of(collector(), pressure=101_325.0)) is None


@pytest.mark.parametrize(
    "overrides",
    [
        ["operation.mean_C=25"],
        ["mounting.tilt_deg=0"],
        ["operation.inlet_C=0"],
        ["operation.inlet_C=15", "collector.absorber.emittance=0.95"],
        ["operation.inlet_C=80", "operation.start_K=5", "operation.stop_K=1.5", "collector.capacity_kJ_m2K=1.7"],
    ],
)
def test_hours_at_a_kink_of_a_relation_are_solved_too(overrides):
    """Each of these years has hours at the onset of convection, or of a pump that comes and goes, that no exponential describes."""
    scenario = read_scenario(SCENARIO, overrides=overrides)
    (solved,) = heat_years(scenario, weather=open_scenario_weather(scenario, base=SCENARIO.parent))
    assert solved.drift is not None
    assert solved.drift.converged.all()
    out = solved.drift.useful + solved.drift.losses.total + solved.drift.idle + solved.drift.stored
    assert np.abs(solved.conditions.absorbed.plate - out).max() < 1e-6
    assert np.abs(np.diff(solved.drift.t_end)).max() < 300.0
