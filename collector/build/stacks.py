"""A coating ready for its optics: layers and tables of optical constants brought to one grid of wavelengths."""

from __future__ import annotations

import math
import os.path
from collections.abc import Iterator, Mapping, Sequence
from pathlib import Path
from typing import NamedTuple

import numpy as np

from collector.build.spectra import IndexTable, read_index
from collector.build.stackfile import LayerTable, StackFile, read_stack_file
from collector.build.table import Key, Where
from collector.physics.layers import Complexes, Film, bruggeman_1935, maxwell_garnett_1904
from weather.errors import InputError, Problem
from weather.year import Floats

__all__ = ["FilmStack", "read_stack"]

RULES = {"bruggeman": bruggeman_1935, "maxwell-garnett": maxwell_garnett_1904}
DILUTE = 0.3  # volume of inclusions up to which Maxwell Garnett's rule is commonly used; common practice, no source
FEWEST_POINTS, MOST_POINTS = 300, 4000
POINTS_A_FRINGE = 8


class FilmStack(NamedTuple):
    """A coating ready for `film_stack`: its title, wavelengths ``(n,)`` [m], films, index of the base, what was noticed."""

    title: str
    wavelength: Floats
    films: tuple[Film, ...]
    substrate: Complexes
    notices: tuple[str, ...]


def read_stack(path: Path, overrides: Sequence[str] = ()) -> FilmStack:
    """Read a coating's layers and their tables of optical constants, and bring all to one grid of wavelengths.

    Parameters
    ----------
    path
        TOML file; the tables it names lie relative to it.
    overrides
        ``key.path=value`` as in TOML; a layer goes by its number, from 0: ``layer.0.thickness_nm=70``.

    Returns
    -------
    FilmStack
        On the wavelengths that all tables hold: their own points together, and at least 300 evenly in the logarithm.

    Raises
    ------
    InputError
        All faults of the file, or else all faults of the tables, together.
    """
    described, where = read_stack_file(path, overrides=overrides)
    tables = _tables(described, where=where, base=path.parent)
    grid, notices = _grid(described, tables=tables, path=path)
    films = tuple(Film(_index(layer, tables=tables, grid=grid), layer.thickness_nm * 1e-9) for layer in described.layer)
    said = [notice for table in tables.values() for notice in table.notices]
    base = _interpolated(tables[described.substrate.index_csv], grid=grid)
    return FilmStack(described.title, grid, films, base, (*said, *notices, *_undilute(described)))


def _named_files(described: StackFile) -> Iterator[tuple[Key, str]]:
    """Every table of optical constants that the file names, with its key."""
    yield ("substrate", "index_csv"), described.substrate.index_csv
    for number, layer in enumerate(described.layer):
        if layer.index_csv is not None:
            yield ("layer", number, "index_csv"), layer.index_csv
        if layer.mixture is not None:
            yield ("layer", number, "mixture", "inclusion_csv"), layer.mixture.inclusion_csv
            yield ("layer", number, "mixture", "host_csv"), layer.mixture.host_csv


def _tables(described: StackFile, *, where: Where, base: Path) -> dict[str, IndexTable]:
    tables: dict[str, IndexTable] = {}
    faults: list[Problem] = []
    for key, name in _named_files(described):
        file = base / name
        if not os.path.isfile(file):  # noqa: PTH113 # a path that the system refuses is no file, where pathlib's raises
            what = f"{'.'.join(map(str, key))}: no such file"
            faults.append(Problem(where=where(key), what=what, got=repr(name), do=f"looked for {file}"))
        elif name not in tables:
            try:
                tables[name] = read_index(file)
            except InputError as found:
                faults += [problem for problem in found.problems if problem not in faults]
    if faults:
        raise InputError(faults)
    return tables


def _grid(described: StackFile, *, tables: Mapping[str, IndexTable], path: Path) -> tuple[Floats, list[str]]:
    """Wavelengths that all tables hold, fine enough for the fringes of the films."""
    low = max(float(table.wavelength[0]) for table in tables.values())
    high = min(float(table.wavelength[-1]) for table in tables.values())
    spans = {
        name: f"{table.wavelength[0] * 1e6:.4g} to {table.wavelength[-1] * 1e6:.4g} um"
        for name, table in tables.items()
    }
    if low >= high:
        got = "; ".join(f"{name} {span}" for name, span in spans.items())
        raise InputError(Problem(where=str(path), what="tables have no range of wavelengths in common", got=got))
    span = f"{low * 1e6:.4g} to {high * 1e6:.4g} um"
    notices = [
        f"{name} holds {own}; of that {span}, common to all, is used" for name, own in spans.items() if own != span
    ]
    waves = sum(
        layer.thickness_nm * 1e-9 * _waves_per_metre(layer, tables=tables, low=low) for layer in described.layer
    )
    wanted = math.ceil(math.log(high / low) * POINTS_A_FRINGE * 2.0 * waves)
    if wanted > MOST_POINTS:
        notices.append(f"films so thick that {wanted} points would follow their fringes; {MOST_POINTS} are used")
    even = np.geomspace(low, high, min(max(wanted, FEWEST_POINTS), MOST_POINTS)).clip(low, high)
    own = [table.wavelength[(table.wavelength >= low) & (table.wavelength <= high)] for table in tables.values()]
    return np.unique(np.concatenate([even, *own])), notices


def _waves_per_metre(layer: LayerTable, *, tables: Mapping[str, IndexTable], low: float) -> float:
    """Largest number of waves that a metre of a layer's material holds."""
    if layer.n is not None:
        return layer.n / low
    mixed = (layer.mixture.inclusion_csv, layer.mixture.host_csv) if layer.mixture else (layer.index_csv,)
    used = [tables[name] for name in mixed if name is not None]
    return max(float((table.refractive_index.real / table.wavelength).max()) for table in used)


def _interpolated(table: IndexTable, *, grid: Floats) -> Complexes:
    return np.asarray(np.interp(grid, table.wavelength, table.refractive_index), dtype=np.complex128)


def _index(layer: LayerTable, *, tables: Mapping[str, IndexTable], grid: Floats) -> Complexes:
    if layer.mixture is not None:
        inclusion, host = (
            _interpolated(tables[n], grid=grid) for n in (layer.mixture.inclusion_csv, layer.mixture.host_csv)
        )
        return RULES[layer.mixture.rule](inclusion=inclusion, host=host, fraction=layer.mixture.fraction)
    if layer.index_csv is not None:
        return _interpolated(tables[layer.index_csv], grid=grid)
    return np.full(grid.size, complex(layer.n or 0.0, layer.k or 0.0))


def _undilute(described: StackFile) -> list[str]:
    return [
        f"layer.{number}: Maxwell Garnett's rule is meant for few inclusions, and {layer.mixture.fraction:g} is above {DILUTE:g}"
        for number, layer in enumerate(described.layer)
        if layer.mixture and layer.mixture.rule == "maxwell-garnett" and layer.mixture.fraction > DILUTE
    ]
