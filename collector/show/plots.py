"""Figures of a year, drawn without a screen."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from pathlib import Path
from typing import Any

from matplotlib.axes import Axes
from matplotlib.figure import Figure

from collector.show.tables import MONTHS, PATHS, temperature_words

__all__ = ["FAINT", "FIGURES", "HEAT", "INK", "LOSS", "SIZE", "SUN", "draw_months", "draw_sunlight", "save_figure"]

SUN, HEAT, LOSS, INK, FAINT = (
    "#e8c468",
    "#a3341f",
    "#9aa3ab",
    "#22272b",
    "#d8dcdf",
)  # told apart in grey, and without red and green
SIZE = (8.0, 4.6)  # in


def draw_months(run: Mapping[str, Any]) -> Figure:
    """Heat and sunlight of each month.

    Parameters
    ----------
    run
        Account of the run.

    Returns
    -------
    Figure
        Bars: the sunlight on the plane, and in front of it the heat.
    """
    figure, axes = _sheet(run, title="Heat by month")
    places = range(12)
    plane = [month["plane_kWh_m2"] for month in run["months"]]
    heat = [month["useful_kWh_m2"] for month in run["months"]]
    axes.bar(places, plane, width=0.78, color=SUN, label=f"sunlight on the plane, {sum(plane):.0f} kWh/m² a year")
    bars = axes.bar(places, heat, width=0.5, color=HEAT, label=f"heat delivered, {sum(heat):.0f} kWh/m² a year")
    inside = min(heat) > 0.15 * max(plane)
    labels = [f"{value:.0f}" for value in heat]
    axes.bar_label(bars, labels, padding=-12 if inside else 2, fontsize=8, color="white" if inside else INK)
    axes.set_xticks(list(places), MONTHS)
    axes.set_ylabel("kWh per m² of collector and month")
    axes.set_ylim(0.0, 1.2 * max(*plane, 1.0))
    axes.legend(frameon=False, loc="upper left", ncols=2, fontsize=9)
    return figure


def draw_sunlight(run: Mapping[str, Any]) -> Figure:
    """Where the year's sunlight went: each bar takes off what went there, until the heat remains.

    Parameters
    ----------
    run
        Account of the run.

    Returns
    -------
    Figure
        One bar a path, the sunlight above and the heat below.
    """
    figure, axes = _sheet(run, title="Where the year's sunlight went")
    shown = [(key, words) for key, words in PATHS if key != "useful_kWh_m2" and abs(run[key]) >= 0.05]
    labels = ["sunlight on the plane", *(words for _, words in shown), "heat delivered"]
    left = plane = run["plane_kWh_m2"]
    _bar(axes, 0, start=0.0, width=plane, colour=SUN, plane=plane)
    for row, (key, _) in enumerate(shown, start=1):
        _bar(axes, row, start=left - run[key], width=run[key], colour=LOSS, plane=plane)
        left -= run[key]
    _bar(axes, len(labels) - 1, start=0.0, width=run["useful_kWh_m2"], colour=HEAT, plane=plane)
    axes.set_yticks(range(len(labels)), labels)
    axes.invert_yaxis()
    axes.set_xlabel("kWh per m² of collector and year")
    axes.set_xlim(0.0, 1.27 * max(plane, 1.0))
    axes.grid(axis="x", color=FAINT, linewidth=0.6)
    axes.set_axisbelow(True)
    axes.tick_params(axis="y", length=0)
    return figure


FIGURES: dict[str, Callable[[Mapping[str, Any]], Figure]] = {
    "heat-by-month": draw_months,
    "where-the-sunlight-went": draw_sunlight,
}


def save_figure(figure: Figure, *, path: Path) -> None:
    """Write a figure as PNG.

    Parameters
    ----------
    figure
        Drawn.
    path
        Of the file.
    """
    figure.savefig(path, format="png", dpi=160)


def _bar(axes: Axes, row: int, *, start: float, width: float, colour: str, plane: float) -> None:
    axes.barh(row, width, left=start, height=0.62, color=colour)
    share = 100.0 * width / plane if plane > 0.0 else 0.0
    axes.text(
        max(start, start + width) + 0.01 * plane,
        row,
        f"{width:.0f}  ({share:.1f} %)",
        va="center",
        fontsize=9,
        color=INK,
    )


def _sheet(run: Mapping[str, Any], *, title: str) -> tuple[Figure, Axes]:
    figure = Figure(figsize=SIZE, layout="constrained", facecolor="white")
    axes = figure.add_subplot()
    axes.spines[["top", "right"]].set_visible(False)
    axes.tick_params(labelsize=9, colors=INK)
    weather = run["weather"]
    figure.suptitle(f"{title}: {run['title']}", fontsize=11, fontweight="bold", color=INK, x=0.01, ha="left", wrap=True)
    axes.set_title(f"{temperature_words(run)}, weather {weather['place']}", fontsize=9, color=INK, loc="left")
    return figure, axes
