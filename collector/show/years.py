"""Several years side by side: page, table and figure."""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path
from typing import Any

from matplotlib.axes import Axes
from matplotlib.figure import Figure

from collector.show.files import csv_text, write_whole
from collector.show.plots import HEAT, INK, SIZE, save_figure
from collector.show.tables import hung, remarks, temperature_words
from collector.study.years import YEAR_COLUMNS

__all__ = ["draw_years", "write_years", "years_text"]

RUN = Mapping[str, Any]
NAME = 28  # columns of a year's name
ROOM = 0.14  # of the figure's width, for the lines' labels
MOST_LABELLED = 20  # points


def years_text(found: RUN) -> str:
    """Several years on a page.

    Parameters
    ----------
    found
        As the study gives it.

    Returns
    -------
    str
        Lines of at most 80 columns.
    """
    blocks = [hung(found["title"], head="")]
    for run in found["runs"]:
        blocks += [_table(run), _spread(run["spread"])]
    blocks.append(
        ["What it says, and what not", *(line for words in found["remarks"] for line in hung(words, head="  - "))]
    )
    blocks += remarks(found["runs"][0]["years"])
    blocks.append(hung("One year alone, with `noonplate year`, prints its whole page.", head=""))
    return "\n\n".join("\n".join(block) for block in blocks) + "\n"


def _plain(name: str) -> str:
    """A name in ASCII, cut where it is too long."""
    name = name.encode("ascii", "replace").decode("ascii")
    return name if len(name) <= NAME else f"{name[: NAME - 2]}.."


def _table(run: RUN) -> list[str]:
    mean = run["spread"]["mean_kWh_m2"]
    lines = [
        f"{'Heat of each year, ' + temperature_words(run):<34} air       GHI     plane      heat   to mean",
        f"{'':<34}   C    kWh/m2    kWh/m2    kWh/m2         %",
    ]
    for number, year in enumerate(run["years"], start=1):
        change = f"{round(100.0 * (year['useful_kWh_m2'] / mean - 1.0), 1) + 0.0:+9.1f}" if mean > 0.0 else f"{'-':>9}"
        lines.append(
            f"{number:3d}  {_plain(year['name']):<{NAME}}{year['air_mean_C']:5.1f}{year['ghi_kWh_m2']:10.1f}"
            f"{year['plane_kWh_m2']:10.1f}{year['useful_kWh_m2']:10.1f}{change}"
        )
    return lines


def _spread(spread: RUN) -> list[str]:
    n, mean, deviation = spread["years"], spread["mean_kWh_m2"], spread["standard_deviation_kWh_m2"]
    share = f", {100.0 * deviation / mean:.1f} % of the mean" if mean > 0.0 else ""
    ranked = spread["p90_rank_kWh_m2"]
    last = f"{'-':>10}" if ranked is None else f"{ranked:10.1f}"
    return [
        f"Mean of {n} years               {mean:8.1f} kWh/m2, standard error {spread['standard_error_kWh_m2']:.1f}",
        f"Standard deviation             {deviation:8.1f} kWh/m2{share}",
        "",
        f"{f'Exceeded, from {n} years':<29}if years are    by rank,",
        f"{'':<29}    normal     m/(n+1)   kWh/m2",
        f"  P50, by half of the years  {spread['p50_normal_kWh_m2']:10.1f}  {spread['p50_rank_kWh_m2']:10.1f}",
        f"  P90, by nine in ten        {spread['p90_normal_kWh_m2']:10.1f}  {last}"
        + ("   a guess, see below" if spread["p90_is_a_guess"] else ""),
    ]


def draw_years(found: RUN, run: RUN) -> Figure:
    """Heat by year as points that hang from the mean, with the P90 across.

    Parameters
    ----------
    found
        As the study gives it.
    run
        One of its runs.

    Returns
    -------
    Figure
        One point a year; the axis does not begin at 0.
    """
    figure = Figure(figsize=SIZE, layout="constrained", facecolor="white")
    axes = figure.add_subplot()
    heat, spread = [year["useful_kWh_m2"] for year in run["years"]], run["spread"]
    mean, p90, right = spread["mean_kWh_m2"], spread["p90_normal_kWh_m2"], (1.0 + ROOM) * len(heat) - 0.5
    axes.vlines(range(len(heat)), mean, heat, color=HEAT, linewidth=2.5)
    axes.plot(range(len(heat)), heat, "o", color=HEAT, markersize=8)
    _lines(axes, mean=mean, p90=p90, right=right)
    for place, value in enumerate(heat if len(heat) <= MOST_LABELLED else ()):
        up = value >= mean
        _note(axes, f"{value:.0f}", at=(place, value), above=7 if up else -7, centred=True)
    low, high = min(*heat, p90), max(*heat)
    margin = max(0.16 * (high - low), 1.0)
    axes.set_xlim(-0.6, right)
    axes.set_ylim(low - margin, high + margin)
    _label(axes, run)
    figure.suptitle(
        f"Heat by year: {found['title']}", fontsize=11, fontweight="bold", color=INK, x=0.01, ha="left", wrap=True
    )
    guess = ", a guess" if spread["p90_is_a_guess"] else ""
    note = f"{temperature_words(run)}; P90 of {spread['years']} years by the normal assumption{guess}; axis not from 0"
    axes.set_title(note, fontsize=9, color=INK, loc="left")
    return figure


def _lines(axes: Axes, *, mean: float, p90: float, right: float) -> None:
    for words, value, style, above in (("mean", mean, "-", 4), ("P90", p90, "--", -4)):
        axes.axhline(value, color=INK, linewidth=1.4, linestyle=style, zorder=1.0)
        _note(axes, f"{words} {value:.0f}", at=(right, value), above=above, centred=False)


def _note(axes: Axes, words: str, *, at: tuple[float, float], above: float, centred: bool) -> None:
    """Words over or under a place, points away from it."""
    side, along = "bottom" if above > 0.0 else "top", "center" if centred else "right"
    paper = {"facecolor": "white", "edgecolor": "none", "pad": 0.8}
    axes.annotate(
        words, at, (0.0, above), textcoords="offset points", ha=along, va=side, fontsize=9, color=INK, bbox=paper
    )


def _label(axes: Axes, run: RUN) -> None:
    names = [year["name"] for year in run["years"]]
    long = max(map(len, names)) * len(names) > 80
    axes.set_xticks(range(len(names)), names, rotation=60 if long else 0, ha="right" if long else "center")
    axes.spines[["top", "right"]].set_visible(False)
    axes.tick_params(labelsize=9, colors=INK)
    axes.set_ylabel("kWh per m² of collector and year")


def write_years(found: RUN, *, out: Path) -> list[str]:
    """Write the table and a figure for each temperature.

    Parameters
    ----------
    found
        As the study gives it.
    out
        The folder.

    Returns
    -------
    list of str
        Names of the files.
    """
    runs = found["runs"]
    rows = [
        (number, *(year[key] for key in YEAR_COLUMNS)) for number, run in enumerate(runs, 1) for year in run["years"]
    ]
    text = csv_text(["run", *YEAR_COLUMNS], rows)
    write_whole(out / "years.csv", write=lambda path: path.write_text(text, encoding="utf-8"))
    written = ["years.csv"]
    for number, run in enumerate(runs, start=1):
        figure = draw_years(found, run)
        written.append("heat-by-year.png" if len(runs) == 1 else f"heat-by-year-{number}.png")
        write_whole(out / written[-1], write=lambda path, figure=figure: save_figure(figure, path=path))  # type: ignore[misc]
    return written
