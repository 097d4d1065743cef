"""Files that a scenario names for its plate and its horizon, read and attached to it."""

from __future__ import annotations

import os.path
from pathlib import Path

from collector.build.obstacles import read_horizon
from collector.build.scenario import AbsorberTable, Scenario
from collector.build.surfaces import Surface, read_surface, refuse_untold
from collector.build.table import Where
from weather.errors import InputError, Problem

__all__ = ["attached"]

KEY = ("collector", "absorber")


def attached(scenario: Scenario, *, where: Where, base: Path) -> Scenario:
    """Scenario with the horizon, and the spectrum or the stack, that it names.

    Parameters
    ----------
    scenario
        Checked.
    where
        Place of a key in the scenario's text.
    base
        Folder that the files' paths count from.

    Returns
    -------
    Scenario
        The same one where it names none.

    Raises
    ------
    InputError
        A file is not there, or is wrong.
    """
    scenario = _under_horizon(scenario, where=where, base=base)
    absorber = scenario.collector.absorber
    if absorber is None or not (absorber.reflectance_csv or absorber.stack):
        return scenario
    table = absorber.with_surface(_surface(absorber, where=where, base=base))
    return scenario.model_copy(update={"collector": scenario.collector.model_copy(update={"absorber": table})})


def _under_horizon(scenario: Scenario, *, where: Where, base: Path) -> Scenario:
    name = scenario.mounting.horizon_csv
    if name is None:
        return scenario
    if not os.path.isfile(base / name):  # noqa: PTH113 # pathlib's raises where the system refuses a path
        place, what = where(("mounting", "horizon_csv")), "mounting.horizon_csv: no such file"
        raise InputError(Problem(where=place, what=what, got=repr(name), do=f"looked for {base / name}"))
    mounting = scenario.mounting.with_horizon(read_horizon(base / name))
    return scenario.model_copy(update={"mounting": mounting})


def _surface(absorber: AbsorberTable, *, where: Where, base: Path) -> Surface:
    key = "stack" if absorber.stack else "reflectance_csv"
    names = [absorber.stack] if absorber.stack else absorber.reflectance_csv or []
    place = where((*KEY, key))
    there = {name for name in names if os.path.isfile(base / name)}  # noqa: PTH113 # pathlib's raises where the system refuses a path
    faults = [
        Problem(
            where=place, what=f"{'.'.join(KEY)}.{key}: no such file", got=repr(name), do=f"looked for {base / name}"
        )
        for name in names
        if name not in there
    ]
    wrong = [name for name in names if (Path(name).suffix.lower() == ".toml") != (key == "stack")]
    allowed = "a TOML file" if key == "stack" else "CSV files; a stack in TOML goes under stack"
    faults += [
        Problem(where=place, what=f"{'.'.join(KEY)}.{key}: wrong kind of file", got=repr(name), allowed=allowed)
        for name in wrong
        if name in there
    ]
    if faults:
        raise InputError(faults)
    surface = read_surface([base / name for name in names], metal=absorber.hemispherical == "metal")
    return refuse_untold(surface, where=place)
