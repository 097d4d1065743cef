"""Figures of a comparison of coatings: their order with intervals, and heat over absorptance and emittance."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure

from collector.show.plots import FAINT, HEAT, INK, LOSS, SIZE, SUN
from collector.show.tables import temperature_words
from weather.year import Floats

__all__ = ["draw_plane", "draw_ranking"]

LONGEST = 34  # characters of a name beside an axis
LEVELS = 10


def draw_ranking(found: Mapping[str, Any]) -> Figure:
    """Difference of each coating's heat to the first one's, best on top, with its interval.

    Parameters
    ----------
    found
        Account of the comparison.

    Returns
    -------
    Figure
        Filled marks are told apart from the first coating, hollow ones are not.
    """
    rows = sorted(found["coatings"], key=lambda row: -row["useful_kWh_m2"])
    figure, axes = _sheet(found, title="Coatings by the year's heat", height=1.9 + 0.55 * max(len(rows), 3))
    first = found["coatings"][0]["useful_kWh_m2"]
    axes.axvline(0.0, color=LOSS, linewidth=1.0)
    for place, row in enumerate(rows):
        low, high = row["interval_kWh_m2"]
        axes.plot([low, high], [place, place], color=INK, linewidth=2.0, solid_capstyle="butt")
        filled = row["told_apart"] or row["coating"] == 1
        face = LOSS if row["coating"] == 1 else HEAT if filled else "white"
        edge = LOSS if row["coating"] == 1 else HEAT
        axes.plot(
            row["difference_kWh_m2"], place, "o", markersize=8, markerfacecolor=face, markeredgecolor=edge, zorder=3
        )
    labels = [
        f"[{row['coating']}] {_short(row['name'])}\n{row['absorptance']:.3f} / {row['emittance']:.3f}" for row in rows
    ]
    axes.set_yticks(range(len(rows)), labels)
    axes.set_ylim(len(rows) - 0.5, -0.5)
    right = axes.secondary_yaxis("right")
    right.set_yticks(range(len(rows)), [_beside(row) for row in rows])
    right.tick_params(length=0, labelsize=9, colors=INK)
    right.spines["right"].set_visible(False)
    axes.margins(x=0.06)
    axes.grid(axis="x", color=FAINT, linewidth=0.6)
    axes.set_axisbelow(True)
    axes.tick_params(axis="y", length=0)
    axes.set_xlabel(f"heat beyond coating [1]'s {first:.0f} kWh/m² a year, with 95 % interval; hollow: not told apart")
    return figure


def draw_plane(found: Mapping[str, Any], *, plane: tuple[Floats, Floats, Floats]) -> Figure:
    """Lines of equal heat over absorptance and emittance, with the coatings and their uncertainty.

    Parameters
    ----------
    found
        Account of the comparison.
    plane
        Absorptance, emittance, and heat over both.

    Returns
    -------
    Figure
        Crosses are two standard uncertainties long to either side.
    """
    figure, axes = _sheet(found, title="Heat over absorptance and emittance", height=SIZE[1])
    absorptance, emittance, heat = plane
    lines = axes.contour(absorptance, emittance, heat, levels=LEVELS, colors=LOSS, linewidths=1.1)
    places = _label_places(lines.allsegs, found, plane=plane)
    axes.clabel(lines, fmt="%g", fontsize=8, colors=INK, manual=places)
    asked = found["asked"]
    for row in found["coatings"]:
        x, y = row["absorptance"], row["emittance"]
        wide, tall = 2.0 * asked["sigma_alpha"], 2.0 * asked["sigma_eps"]
        axes.plot([x - wide, x + wide], [y, y], color=SUN, linewidth=2.0, zorder=2)
        axes.plot([x, x], [max(y - tall, emittance[0]), y + tall], color=SUN, linewidth=2.0, zorder=2)
        axes.plot(x, y, "o", color=HEAT, markersize=7, zorder=3, label=f"[{row['coating']}] {_short(row['name'])}")
    _numbered(axes, found, plane=plane)
    axes.set_xlim(absorptance[0], absorptance[-1])
    axes.set_ylim(emittance[0], emittance[-1])
    axes.set_xlabel("solar absorptance")
    axes.set_ylabel("emittance")
    axes.grid(color=FAINT, linewidth=0.6)
    axes.set_axisbelow(True)
    legend = axes.legend(
        frameon=False, loc="upper left", bbox_to_anchor=(1.0, 1.0), fontsize=9, handlelength=0.0, handletextpad=0.0,
        title="lines: heat, kWh/m² a year\ncrosses: two standard\nuncertainties either way\n",
    )  # fmt: skip
    legend.set_alignment("left")
    legend.get_title().set_fontsize(9)
    for handle in legend.legend_handles:
        if handle is not None:
            handle.set_visible(False)
    return figure


def _label_places(
    segments: Sequence[Sequence[Floats]], found: Mapping[str, Any], *, plane: tuple[Floats, Floats, Floats]
) -> list[tuple[float, float]]:
    """A place on each line of equal heat, away from the coatings' marks and from the frame."""
    low = np.array([plane[0][0], plane[1][0]])
    size = np.array([np.ptp(plane[0]), np.ptp(plane[1])])
    marks = (np.array([[row["absorptance"], row["emittance"]] for row in found["coatings"]]) - low) / size
    places = []
    for paths in segments:
        points = np.concatenate([(path - low) / size for path in paths]) if paths else np.zeros((0, 2))
        points = points[np.all((points > 0.06) & (points < 0.94), axis=1)]
        if points.size:
            clear = np.abs(points[:, None] - marks).max(axis=2).min(axis=1)
            middle = 0.3 * np.abs(points - 0.5).max(axis=1)
            x, y = low + size * points[int(np.argmax(clear - middle))]
            places.append((float(x), float(y)))
    return places


def _numbered(axes: Axes, found: Mapping[str, Any], *, plane: tuple[Floats, Floats, Floats]) -> None:
    """Numbers beside the marks; of marks that lie together one label with all their numbers."""
    width, height = float(np.ptp(plane[0])), float(np.ptp(plane[1]))
    groups: list[list[Mapping[str, Any]]] = []
    for row in found["coatings"]:
        near = (group for group in groups if _near(group[0], row, width=width, height=height))
        found_group = next(near, None)
        groups.append([row]) if found_group is None else found_group.append(row)
    for group in groups:
        words = " ".join(f"[{row['coating']}]" for row in group)
        at = (max(row["absorptance"] for row in group), max(row["emittance"] for row in group))
        box = {"facecolor": "white", "edgecolor": "none", "pad": 1.0, "alpha": 0.85}
        axes.annotate(
            words, at, xytext=(7, 7), textcoords="offset points", fontsize=9, fontweight="bold", color=INK, bbox=box
        )


def _near(one: Mapping[str, Any], other: Mapping[str, Any], *, width: float, height: float) -> bool:
    apart = (one["absorptance"] - other["absorptance"]) / width, (one["emittance"] - other["emittance"]) / height
    return bool(abs(apart[0]) < 0.09 and abs(apart[1]) < 0.07)


def _beside(row: Mapping[str, Any]) -> str:
    if row["order_probability"] is None:
        return f"{row['useful_kWh_m2']:.0f}"
    return f"{row['useful_kWh_m2']:.0f}, order real {100.0 * row['order_probability']:.0f} %"


def _short(name: str) -> str:
    return name if len(name) <= LONGEST else name[: LONGEST - 3].rstrip(" ,") + "..."


def _sheet(found: Mapping[str, Any], *, title: str, height: float) -> tuple[Figure, Axes]:
    figure = Figure(figsize=(SIZE[0], height), layout="constrained", facecolor="white")
    axes = figure.add_subplot()
    axes.spines[["top", "right"]].set_visible(False)
    axes.tick_params(labelsize=9, colors=INK)
    whole = f"{title}: {found['title']}"
    figure.suptitle(whole, fontsize=11, fontweight="bold", color=INK, x=0.01, ha="left", wrap=True)
    axes.set_title(
        f"{temperature_words(found)}, weather {found['weather']['place']}", fontsize=9, color=INK, loc="left"
    )
    return figure, axes
