"""Numbers of a scenario by their key, to be varied: their value, their bounds, and the scenario with others."""

from __future__ import annotations

import difflib
from collections.abc import Iterator, Sequence
from typing import Any, NamedTuple

from pydantic import BaseModel

from collector.build.scenario import Scenario
from weather.errors import InputError, Problem

__all__ = ["Parameter", "parameter_of", "with_values"]


class Parameter(NamedTuple):
    """A number of a scenario: its key, value, and the bounds that the schema sets."""

    key: str
    value: float
    low: float
    high: float


def parameter_of(scenario: Scenario, key: str) -> Parameter:
    """A number of a scenario.

    Parameters
    ----------
    scenario
        Checked.
    key
        Dotted, such as ``collector.absorber.emittance``; a list's entry by its number, from 0.

    Returns
    -------
    Parameter
        With the schema's bounds.

    Raises
    ------
    InputError
        There is no number of that key.
    """
    known = dict(_numbers(scenario, ()))
    if key not in known:
        close = difflib.get_close_matches(key, known, n=1)
        do = f"did you mean {close[0]}?" if close else ""
        allowed = "" if close else "a number that the scenario gives, by its dotted key"
        raise InputError(
            Problem(where="--parameter", what="no such number in the scenario", got=repr(key), allowed=allowed, do=do)
        )
    return Parameter(key, *known[key])


def with_values(scenario: Scenario, *, keys: Sequence[str], values: Sequence[float]) -> Scenario:
    """The same scenario with other numbers, not checked again.

    Parameters
    ----------
    scenario
        Checked.
    keys, values
        Of the numbers; the values within their bounds.

    Returns
    -------
    Scenario
        A copy.
    """
    changed = scenario
    for key, value in zip(keys, values, strict=True):
        changed = _changed(changed, key.split("."), value)
    return changed


def _numbers(table: BaseModel, path: tuple[str, ...]) -> Iterator[tuple[str, tuple[float, float, float]]]:
    for name, field in type(table).model_fields.items():
        value = getattr(table, name)
        here = (*path, name)
        if isinstance(value, BaseModel):
            yield from _numbers(value, here)
        elif isinstance(value, list) and value and isinstance(value[0], BaseModel):
            for number, entry in enumerate(value):
                yield from _numbers(entry, (*here, str(number)))
        elif isinstance(value, float):
            low, high = (
                next((v for m in field.metadata if (v := getattr(m, side, None)) is not None), None)
                for side in ("ge", "le")
            )
            if low is not None and high is not None:
                yield ".".join(here), (value, float(low), float(high))


def _changed(table: Any, path: list[str], value: float) -> Any:
    if not path:
        return value
    if isinstance(table, list):
        place = int(path[0])
        return [*table[:place], _changed(table[place], path[1:], value), *table[place + 1 :]]
    return table.model_copy(update={path[0]: _changed(getattr(table, path[0]), path[1:], value)})
