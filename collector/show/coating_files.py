"""Files of a surface and of a comparison of coatings."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from pathlib import Path
from typing import Any

from matplotlib.figure import Figure

from collector.show.coating_plots import draw_plane, draw_ranking
from collector.show.coating_tables import COATING_COLUMNS, coating_rows
from collector.show.files import csv_text, json_text, write_whole
from collector.show.plots import save_figure
from collector.show.surface_plots import draw_surface
from collector.show.surface_tables import EMITTANCE_COLUMNS, emittance_rows
from weather.year import Floats

__all__ = ["write_coatings", "write_surface"]


def write_surface(found: Mapping[str, Any], *, curves: Mapping[str, tuple[Floats, Floats]], out: Path) -> list[str]:
    """Write a surface's account, its table of emittance and its figure.

    Parameters
    ----------
    found, curves
        Account of the surface and its curves.
    out
        Folder.

    Returns
    -------
    list of str
        Names of the files.
    """
    texts = {
        "summary.json": json_text(found),
        "emittance.csv": csv_text(EMITTANCE_COLUMNS, emittance_rows(found)),
    }
    return _written(out, texts=texts, figures={"reflectance.png": lambda: draw_surface(found, curves=curves)})


def write_coatings(found: Mapping[str, Any], *, plane: tuple[Floats, Floats, Floats], out: Path) -> list[str]:
    """Write a comparison's account, its table and two figures.

    Parameters
    ----------
    found, plane
        Account of the comparison, and heat over absorptance and emittance.
    out
        Folder.

    Returns
    -------
    list of str
        Names of the files.
    """
    texts = {"summary.json": json_text(found), "coatings.csv": csv_text(COATING_COLUMNS, coating_rows(found))}
    figures = {
        "coatings-by-heat.png": lambda: draw_ranking(found),
        "heat-over-coatings.png": lambda: draw_plane(found, plane=plane),
    }
    return _written(out, texts=texts, figures=figures)


def _written(out: Path, *, texts: Mapping[str, str], figures: Mapping[str, Callable[[], Figure]]) -> list[str]:
    for name, text in texts.items():
        write_whole(out / name, write=lambda path, text=text: path.write_text(text, encoding="utf-8"))  # type: ignore[misc] # mypy can't type a default in a lambda
    for name, draw in figures.items():
        figure = draw()
        write_whole(out / name, write=lambda path, figure=figure: save_figure(figure, path=path))  # type: ignore[misc]
    return [*texts, *figures]
