"""Generic materials, each with its published source or the words "from memory"."""

from __future__ import annotations

import tomllib
from functools import lru_cache
from importlib.resources import files
from typing import Any

__all__ = ["SHELVES", "entry", "shelf"]

SHELVES = ("covers", "coatings", "metals", "insulation")


@lru_cache(maxsize=len(SHELVES))
def shelf(name: str) -> dict[str, dict[str, Any]]:
    """All entries of one kind of material.

    Parameters
    ----------
    name
        One of ``SHELVES``.

    Returns
    -------
    dict
        Entry by name; in each the values, keys as in the scenario file, with ``source`` and often a ``note``.
    """
    text = (files("collector.build") / "data" / f"{name}.toml").read_text(encoding="utf-8")
    return tomllib.loads(text)


def entry(kind: str, *, name: str) -> dict[str, Any]:
    """Values of one material.

    Parameters
    ----------
    kind
        One of ``SHELVES``.
    name
        A name on that shelf; the scenario's check has seen to it that it exists.

    Returns
    -------
    dict
        As ``shelf`` gives it.
    """
    return shelf(kind)[name]
