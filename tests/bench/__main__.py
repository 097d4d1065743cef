"""Speed as ratios, measured in one process where it can be: `python -m tests.bench`."""

from __future__ import annotations

import resource
import subprocess
import sys
import time
from collections.abc import Callable, Mapping
from pathlib import Path

import numpy as np
import pandas as pd
from pvlib import solarposition

from collector.balance.optics import absorbed_power, optics_of
from collector.balance.steady import operate
from collector.balance.transient import solve_drift
from collector.build.candidates import read_candidates
from collector.build.reading import read_scenario
from collector.build.scenario import Scenario
from collector.study.asked import Asked
from collector.study.coatings import compared
from collector.study.year import HeatYear, heat_years, open_scenario_weather, standing
from tests.bench.compiled import compiled_loop
from tests.bench.script import hour_by_hour
from weather.sun import sun_position

SCENARIO = Path(__file__).parents[2] / "scenarios" / "laundry.toml"
ROUNDS = 15
DESIGNS = 1000
HELD = 9000.0  # J/m2K
Row = tuple[str, str, float, float | None]


def main() -> None:
    if len(sys.argv) == 3 and sys.argv[1] == "designs":
        _many_designs(int(sys.argv[2]))
        return
    rows = [*_in_process(), *_memory(), *_whole_commands()]
    print(f"{'what':<52} {'measured as':<34} {'ratio':>8} {'reach':>8}")
    for what, measured, ratio, reach in rows:
        print(f"{what:<52} {measured:<34} {ratio:8.3f} {'' if reach is None else format(reach, '8.3g'):>8}")


def _best(actions: Mapping[str, Callable[[], object]], *, rounds: int = ROUNDS) -> dict[str, float]:
    """Shortest time of each [s], taken in turns, so that a busy moment of the machine does not hit one alone."""
    best = dict.fromkeys(actions, float("inf"))
    for _ in range(rounds):
        for name, action in actions.items():
            start = time.perf_counter()
            action()
            best[name] = min(best[name], time.perf_counter() - start)
    return best


def _demo() -> tuple[HeatYear, Callable[[], object], Callable[[], object]]:
    scenario = read_scenario(SCENARIO)
    weather = open_scenario_weather(scenario, base=SCENARIO.parent)
    sun = sun_position(weather)
    (year,) = heat_years(scenario, weather=weather, sun=sun, held=False)
    index = pd.DatetimeIndex(weather.time_mid).tz_localize("UTC")
    site = weather.site

    def sun_of_the_year() -> object:
        return solarposition.get_solarposition(
            index, site.latitude_deg, site.longitude_deg, site.altitude_m, method="nrel_numpy"
        )

    return year, sun_of_the_year, lambda: heat_years(scenario, weather=weather, sun=sun, held=False)


def _in_process() -> list[Row]:
    year, sun_of_the_year, whole_year = _demo()
    conditions = year.conditions

    def solve() -> object:
        return operate(conditions.model.network, conditions.around, conditions.absorbed, uptake=year.uptake)

    def drift() -> object:
        return solve_drift(
            conditions.model.network, conditions.around, conditions.absorbed, capacity=HELD, uptake=year.uptake
        )

    actions: dict[str, Callable[[], object]] = {
        "sun": sun_of_the_year,
        "solve": solve,
        "stagnation": lambda: standing(conditions),
        "drift": drift,
        "design": lambda: _design(year),
        "year": whole_year,
    }
    loop = compiled_loop(conditions, year.uptake)
    if loop:
        useful, _, _ = loop()
        assert abs(useful.sum() / 1e3 - year.useful_kWh_m2) < 1e-3, "the compiled loop solves something else"
        actions["loop"] = loop
    best = _best(actions)
    sun = best["sun"]
    script = _script(year)
    rows: list[Row] = [
        (
            "one year, running and stagnation, steady",
            "thermal solve / sun position",
            (best["solve"] + best["stagnation"]) / sun,
            0.20,
        ),
        ("  of which running", "the same", best["solve"] / sun, None),
        ("one year with heat held", "the same", best["drift"] / sun, 0.40),
        ("one more design on the same site", "optics, balance / sun position", best["design"] / sun, 0.13),
        ("one more design and plane", "sunlight on the plane too / same", best["year"] / sun, None),
        ("against the script one would write", "brentq hour by hour / ours", script / best["solve"], 200.0),
    ]
    rows += _coated(year)
    if loop:
        rows.append(("distance to a compiled loop (C, -O2)", "ours / the loop", best["solve"] / best["loop"], None))
    print(f"sun position of the year {1e3 * sun:.1f} ms, design-year {1e3 * best['design']:.2f} ms on this machine\n")
    return rows


def _coated(year: HeatYear) -> list[Row]:
    """A year whose emittance follows the plate's temperature, and a comparison of coatings, against plain years."""
    weather = year.conditions.weather
    plain = read_scenario(SCENARIO)
    spectrum = read_scenario(SCENARIO, overrides=["collector.absorber.reflectance_csv=coatings/selective.csv"])
    coatings = SCENARIO.parent / "coatings"
    names = [
        "0.95/0.05",
        str(coatings / "selective.csv"),
        str(coatings / "cermet-stack.toml"),
        "black chrome on nickel",
    ]
    sun = sun_position(weather)

    def several() -> object:
        candidates = read_candidates([*names, "selective paint"])
        return compared(plain, candidates, weather=weather, asked=Asked(draws=500))

    def years(scenario: Scenario, count: int) -> Callable[[], object]:
        return lambda: [heat_years(scenario, weather=weather, sun=sun) for _ in range(count)]

    best = _best({"plain": years(plain, 1), "spectrum": years(spectrum, 1)})
    best |= _best({"25": years(plain, 25), "coatings": several}, rounds=5)
    return [
        ("year with a spectrum", "the year / plain year", best["spectrum"] / best["plain"], 1.25),
        ("coatings, 5 x 500 draws", "files read too / 25 plain years", best["coatings"] / best["25"], 1.0),
    ]


def _design(year: HeatYear) -> float:
    """What each further design on a site costs: its optics, its loss network, its fluid, its year."""
    conditions = year.conditions
    absorbed = absorbed_power(optics_of(year.conditions.model.collector), conditions.plane)
    running, _ = operate(conditions.model.network, conditions.around, absorbed, uptake=year.uptake)
    return float(running.useful.sum())


def _script(year: HeatYear) -> float:
    """Time of the hour-by-hour script for the whole year [s], from every 40th hour, and a check that it agrees."""
    hours = np.arange(7, len(year.on), 40)
    start = time.perf_counter()
    useful = hour_by_hour(year.conditions, year.uptake, hours)
    elapsed = time.perf_counter() - start
    ours = np.zeros(len(year.on))
    assert year.running is not None
    ours[year.on] = year.running.useful
    assert np.abs(ours[hours] - useful).max() < 0.1, "the script solves something else"
    return elapsed * len(year.on) / len(hours)


def _many_designs(count: int) -> None:
    """Solve a number of designs on one site and print the peak of memory [kB]."""
    year, _, _ = _demo()
    for _ in range(count):
        _design(year)
    print(resource.getrusage(resource.RUSAGE_SELF).ru_maxrss)


def _memory() -> list[Row]:
    peaks = {}
    for count in (1, DESIGNS):
        command = [sys.executable, "-m", "tests.bench", "designs", str(count)]
        peaks[count] = int(subprocess.run(command, check=True, capture_output=True, text=True).stdout)
    return [(f"memory of {DESIGNS} designs", "peak / peak of 1", peaks[DESIGNS] / peaks[1], 1.3)]


def _whole_commands() -> list[Row]:
    """Wall times of whole processes, the shortest of several taken in turns."""
    noonplate = str(Path(sys.executable).with_name("noonplate"))
    commands = {
        "help": [noonplate, "--help"],
        "year": [noonplate, "year", str(SCENARIO)],
        "pvlib": [sys.executable, "-c", "import pvlib"],
    }
    actions = {
        name: lambda command=command: subprocess.run(command, check=True, capture_output=True)
        for name, command in commands.items()
    }
    best = _best(actions, rounds=7)
    return [
        ("`noonplate --help`", "wall, s", best["help"], 0.15),
        ("`noonplate year` on the demo", "wall / `import pvlib`", best["year"] / best["pvlib"], 1.8),
    ]


if __name__ == "__main__":
    main()
