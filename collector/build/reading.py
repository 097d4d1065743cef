"""From a TOML file to a checked scenario: every fault at once, each with its line."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path

from collector.build.attached import attached
from collector.build.scenario import COMPANIONS, RIVALS, Scenario
from collector.build.table import read_table

__all__ = ["read_scenario"]


def read_scenario(path: Path, *, overrides: Sequence[str] = ()) -> Scenario:
    """Read, override and check a scenario.

    Parameters
    ----------
    path
        TOML file.
    overrides
        ``key.path=value``, the value written as in TOML; a bare word is text. A list's entry goes by its number, from 0:
        ``collector.cover.0.gap_mm=20``. Setting one of two keys that exclude each other takes the other out.

    Returns
    -------
    Scenario
        Checked.

    Raises
    ------
    InputError
        All faults together, in the file's order.
    """
    scenario, where = read_table(
        path,
        model=Scenario,
        overrides=overrides,
        rivals=RIVALS,
        companions=COMPANIONS,
        do="check the path, or write a starter with `noonplate new`",
    )
    return attached(scenario, where=where, base=path.parent)
