"""A weather file on one page of figures."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure

from collector.show.plots import FAINT, HEAT, INK, LOSS, SUN
from collector.show.tables import MONTHS

__all__ = ["draw_weather"]

PAGE = (8.3, 9.4)  # in
STARTS = np.cumsum([0, 31, 28, 31, 30, 31, 30, 31, 31, 30, 31, 30])  # day on which each month begins
MOST_POINTS = 4000
Curves = Mapping[str, np.ndarray[Any, np.dtype[np.float64]]]


def draw_weather(found: Mapping[str, Any], curves: Curves) -> Figure:
    """Daily sunlight under a clear sky's, its carpet of hour against day, the closure, and air and wind.

    Parameters
    ----------
    found
        Account of the file.
    curves
        Hourly, as the study gives them.

    Returns
    -------
    Figure
        Four panels.
    """
    figure = Figure(figsize=PAGE, layout="constrained", facecolor="white")
    grid = figure.subplot_mosaic(
        [["daily", "daily"], ["carpet", "carpet"], ["closure", "air"]], height_ratios=[1.0, 1.05, 1.25]
    )
    title = f"{found['place']}: {found['ghi_kWh_m2']:.0f} kWh/m² a year on the horizontal"
    figure.suptitle(title, fontsize=11, fontweight="bold", color=INK, x=0.01, ha="left", wrap=True)
    for axes in grid.values():
        axes.spines[["top", "right"]].set_visible(False)
        axes.tick_params(labelsize=8, colors=INK)
    days = len(curves["ghi"]) // 24
    _daily(grid["daily"], curves, days=days, found=found)
    _carpet(figure, grid["carpet"], curves, days=days)
    _closure(grid["closure"], curves, found=found)
    _air(grid["air"], curves, days=days)
    return figure


def _by_day(values: np.ndarray[Any, Any], days: int) -> np.ndarray[Any, Any]:
    return np.asarray(values[: 24 * days].reshape(days, 24))


def _months(axes: Axes, days: int) -> None:
    """Month names under the days of one year; the number of the day for several."""
    axes.set_xlim(0, days)
    if days <= 366:
        axes.set_xticks(list(STARTS + 15), MONTHS)
        axes.tick_params(axis="x", length=0)
    else:
        axes.set_xlabel("day", fontsize=8)


def _daily(axes: Axes, curves: Curves, *, days: int, found: Mapping[str, Any]) -> None:
    sunlight, clear = (_by_day(curves[name], days).sum(axis=1) / 1e3 for name in ("ghi", "clear"))
    axes.bar(np.arange(days) + 0.5, sunlight, width=1.0, color=SUN, label="global horizontal")
    axes.plot(np.arange(days) + 0.5, clear, color=INK, linewidth=1.2, label="clean sky without cloud")
    above = int(np.count_nonzero(sunlight > clear))
    axes.set_title(f"Sunlight by day; {above} days above a clean, clear sky", fontsize=9, loc="left", color=INK)
    axes.set_ylabel("kWh/m² a day", fontsize=8)
    axes.set_ylim(0.0, 1.3 * max(clear.max(), sunlight.max(), 0.1))
    axes.legend(frameon=False, fontsize=8, ncols=2, loc="upper left")
    _months(axes, days)
    del found


def _carpet(figure: Figure, axes: Axes, curves: Curves, *, days: int) -> None:
    picture = axes.imshow(
        _by_day(curves["ghi"], days).T, aspect="auto", origin="lower", cmap="cividis", extent=(0, days, 0, 24), vmin=0.0,
        interpolation="nearest",
    )  # fmt: skip
    off = _by_day(curves["solar_hour"], days) - 12.0
    nearest = np.argmin(np.abs(off), axis=1)
    noon = nearest + 0.5 - off[np.arange(days), nearest]
    axes.plot(np.arange(days) + 0.5, noon, color="white", linewidth=0.9, linestyle="--")
    title = "Sunlight by hour and day; dashed: the hour of solar noon, about which it should lie evenly"
    axes.set_title(title, fontsize=9, loc="left", color=INK)
    axes.set_ylabel("hour from the file's first row", fontsize=8)
    axes.set_yticks([0, 6, 12, 18, 24])
    bar = figure.colorbar(picture, ax=axes, pad=0.01, aspect=14)
    bar.set_label("W/m²", fontsize=8)
    bar.ax.tick_params(labelsize=8)
    _months(axes, days)


def _closure(axes: Axes, curves: Curves, *, found: Mapping[str, Any]) -> None:
    lit = np.flatnonzero(curves["lit"] > 0.5)
    lit = lit[:: max(len(lit) // MOST_POINTS, 1)]
    top = 1.05 * max(curves["ghi"].max(), curves["components"].max(), 1.0)
    axes.plot(curves["components"][lit], curves["ghi"][lit], ".", markersize=1.6, color=HEAT, rasterized=True)
    axes.plot([0, top], [0, top], color=INK, linewidth=0.8)
    error = found["stamp_error_W_m2"]
    words = "made from each other" if found["radiation_made"] else "too little beam to tell"
    title = "Closure, hours with beam: " + (words if error is None else f"{error:.1f} W/m² rms")
    axes.set_title(title, fontsize=9, loc="left", color=INK)
    axes.set_xlabel("DHI + DNI cos z, W/m²", fontsize=8)
    axes.set_ylabel("GHI, W/m²", fontsize=8)
    axes.set_xlim(0, top)
    axes.set_ylim(0, top)


def _air(axes: Axes, curves: Curves, *, days: int) -> None:
    air, wind = _by_day(curves["t_air_C"], days), _by_day(curves["wind"], days)
    place = np.arange(days) + 0.5
    axes.fill_between(
        place, air.min(axis=1), air.max(axis=1), color=LOSS, linewidth=0, label="air, lowest to highest of the day, C"
    )
    axes.plot(place, air.mean(axis=1), color=INK, linewidth=0.8, label="air, mean of the day, C")
    axes.set_title("Air temperature and wind", fontsize=9, loc="left", color=INK)
    axes.set_ylabel("C", fontsize=8)
    low, high = float(air.min()), float(air.max())
    axes.set_ylim(low - 0.55 * (high - low) - 1.0, high + 0.45 * (high - low) + 1.0)
    axes.grid(axis="y", color=FAINT, linewidth=0.5)
    axes.set_axisbelow(True)
    gusts = axes.twinx()
    gusts.plot(place, wind.mean(axis=1), color=HEAT, linewidth=0.8, linestyle="-", label="wind, mean of the day, m/s")
    gusts.set_ylim(0.0, 4.0 * max(float(wind.mean(axis=1).max()), 0.5))
    gusts.set_ylabel("m/s", fontsize=8, color=HEAT)
    gusts.tick_params(labelsize=8, colors=HEAT)
    gusts.spines[["top"]].set_visible(False)
    handles, names = axes.get_legend_handles_labels()
    more, others = gusts.get_legend_handles_labels()
    axes.legend(handles + more, names + others, frameon=False, fontsize=7, loc="upper left")
    _months(axes, days)
    if days <= 366:
        axes.set_xticklabels([name[0] for name in MONTHS])
