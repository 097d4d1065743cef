"""The figure of a surface: its reflectance against sunlight and against what it radiates, over one wavelength axis."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from matplotlib.axes import Axes
from matplotlib.figure import Figure

from collector.show.plots import FAINT, HEAT, INK, SIZE, SUN
from weather.year import Floats

__all__ = ["draw_surface"]

WARM = "#3f6f8f"  # a black body at the working temperature
TICKS = (0.3, 0.5, 1.0, 2.0, 5.0, 10.0, 20.0, 40.0)  # um


def draw_surface(found: Mapping[str, Any], *, curves: Mapping[str, tuple[Floats, Floats]]) -> Figure:
    """Reflectance, sunlight and black bodies at the working and the stagnation temperature.

    Parameters
    ----------
    found
        Account of the surface.
    curves
        Its curves, wavelength in metres.

    Returns
    -------
    Figure
        Powers are per relative step of wavelength, so that equal areas are equal powers, each over its own peak.
    """
    figure = Figure(figsize=SIZE, layout="constrained", facecolor="white")
    axes = figure.add_subplot()
    axes.spines[["top", "right"]].set_visible(False)
    axes.tick_params(labelsize=9, colors=INK)
    working, stagnation = found["working"], found["stagnation"]
    axes.fill_between(*_um(curves["sun"]), color=SUN, linewidth=0.0, label="sunlight, ASTM G173 global")
    lines: list[tuple[str, str, str, dict[str, Any]]] = [
        ("working", f"black body at {working['t_C']:.0f} °C, working", WARM, {"linestyle": (0, (4.0, 2.0))}),
        ("stagnation", f"black body at {stagnation['t_C']:.0f} °C, stagnation", HEAT, {"linestyle": (0, (1.2, 1.6))}),
        ("reflectance", "reflectance of the surface", INK, {"linewidth": 2.2}),
    ]
    for name, label, colour, style in lines:
        axes.plot(*_um(curves[name]), color=colour, label=label, **({"linewidth": 1.6} | style))
    _axes(axes, found)
    title = f"Reflectance: {found['name']}"
    figure.suptitle(title, fontsize=11, fontweight="bold", color=INK, x=0.01, ha="left", wrap=True)
    words = (
        f"absorptance {found['absorptance']['global']['value']:.3f}; emittance {_used(working)} and {_used(stagnation)}"
    )
    axes.set_title(f"{words}\n{found['basis']}", fontsize=9, color=INK, loc="left")
    figure.legend(*axes.get_legend_handles_labels(), frameon=False, loc="outside lower center", ncols=2, fontsize=9)
    return figure


def _axes(axes: Axes, found: Mapping[str, Any]) -> None:
    axes.set_xscale("log")
    axes.set_xlim(min(0.28, float(found["from_um"])), max(40.0, float(found["to_um"])))
    axes.set_xticks(TICKS, [f"{tick:g}" for tick in TICKS])
    axes.minorticks_off()
    axes.set_ylim(0.0, 1.06)
    axes.set_xlabel("wavelength in µm")
    axes.set_ylabel("reflectance; power over its own peak")
    axes.grid(color=FAINT, linewidth=0.6)
    axes.set_axisbelow(True)


def _um(curve: tuple[Floats, Floats]) -> tuple[Floats, Floats]:
    wavelength, values = curve
    return wavelength * 1e6, values


def _used(row: Mapping[str, Any]) -> str:
    eps = row["normal"] if row["hemispherical"] is None else row["hemispherical"]
    return f"{'not known' if eps is None else format(eps, '.3f')} at {row['t_C']:.0f} °C"
