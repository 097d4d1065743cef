"""The efficiency curve as text and as the figure of a data sheet."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import TYPE_CHECKING, Any

import numpy as np

from collector.show.tables import hung, remarks

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

__all__ = ["curve_text", "draw_curves"]

LINES = (  # colour and dash: told apart in grey and by the colour-blind
    ("#a3341f", "-"), ("#1f6f8b", "--"), ("#8a6d1f", "-."), ("#22272b", ":"), ("#7a5195", (0, (5, 1, 1, 1, 1, 1))),
)  # fmt: skip
OPTICAL, HEAT, INK, FAINT = "#f7efd2", "#c3cad0", "#22272b", "#d8dcdf"


def curve_text(curve: Mapping[str, Any]) -> str:
    """One collector's curve on a page.

    Parameters
    ----------
    curve
        As the study gives it.

    Returns
    -------
    str
        Lines of at most 80 columns.
    """
    blocks = [
        _head(curve),
        _coefficients(curve),
        _points(curve),
        _modifiers(curve),
        _stagnation(curve),
        *remarks([curve]),
    ]
    return "\n\n".join("\n".join(block) for block in blocks) + "\n"


def _head(curve: Mapping[str, Any]) -> list[str]:
    return [*hung(curve["title"], head=""), _bench(curve, degree="C", per="/m2")]


def _bench(curve: Mapping[str, Any], *, degree: str, per: str) -> str:
    bench = curve["bench"]
    light = f"beam {bench['irradiance_W_m2']:g} W{per} at normal incidence"
    return (
        f"{light}, air {bench['air_C']:g} {degree}, wind {bench['wind_m_s']:g} m/s, sky {bench['sky_C']:.0f} {degree}"
    )


def _coefficients(curve: Mapping[str, Any]) -> list[str]:
    rows = [("eta0", "eta0", "", ".4f"), ("a1", "a1_W_m2K", "W/m2K", ".3f"), ("a2", "a2_W_m2K2", "W/m2K2", ".5f")]
    gross = curve.get("per_gross")
    lines = ["Coefficients (ISO 9806, steady state)    length x width   gross area"]
    for words, key, unit, form in rows:
        other = format(gross[key], form) if gross else "-"
        lines.append(f"  {words:<6} {unit:<28} {format(curve[key], form):>18} {other:>12}")
    if curve["a5_kJ_m2K"] is not None:
        lines.append(f"  {'a5':<6} {'kJ/m2K':<28} {curve['a5_kJ_m2K']:18.2f}")
    largest, rms = curve["fit_largest_points"], curve["fit_rms_points"]
    lines.append(f"  fit: largest {largest:.2f}, rms {rms:.2f} percentage points of efficiency")
    sky, peak = curve["eta0_hemispherical"], curve["peak_W_per_module"]
    lines.append(f"  eta0 for blue-sky hemispherical light {sky:.4f}, peak {peak:.0f} W a module")
    if "with_terms" in curve:
        lines += _with_terms(curve["with_terms"])
    return lines


def _with_terms(found: Mapping[str, Any]) -> list[str]:
    """Coefficients fitted together with wind and long wave; eta0, a1 and a2 then mean 3 m/s and a sky as warm as the air."""
    names = [f"{key.split('_')[0]} {value:.5g}" for key, value in found.items() if not key.startswith("fit")]
    largest, rms = found["fit_largest_points"], found["fit_rms_points"]
    return [
        *hung(f"{', '.join(names)}", head="  with wind and long wave: "),
        f"  their fit: largest {largest:.2f}, rms {rms:.2f} percentage points",
    ]


def _points(curve: Mapping[str, Any]) -> list[str]:
    lines = ["Mean fluid above air, K   (tm-ta)/G, m2K/W   efficiency"]
    lines += [
        f"  {point['above_air_K']:21.1f}   {point['reduced_m2K_W']:16.4f}   {point['efficiency']:10.4f}"
        for point in curve["points"]
    ]
    at = curve["working_point"]
    lines.append(
        f"  at {at['above_air_K']:g} K: efficiency {at['efficiency']:.3f}, optical loss {at['optical_loss']:.3f}, "
        f"heat loss {at['heat_loss']:.3f}"
    )
    return lines


def _modifiers(curve: Mapping[str, Any]) -> list[str]:
    angles = "".join(f"{row['incidence_deg']:7.0f}" for row in curve["K_beam"])
    values = "".join(f"{row['K']:7.3f}" for row in curve["K_beam"])
    error = curve["b0_largest_error"]
    b0 = f"  b0 {curve['b0']:.3f} (largest error to 60 deg {error:.3f}), diffuse K {curve['K_diffuse']:.3f}"
    return ["Incidence modifiers", f"  beam, deg{angles}", f"  K        {values}", b0]


def _stagnation(curve: Mapping[str, Any]) -> list[str]:
    still = curve["stagnation"]
    return [
        "Standard stagnation, 1000 W/m2 and 30 C air",
        f"  by the heat balance           {still['balance_C']:6.1f} C",
        f"  as a laboratory extrapolates  {still['laboratory_C']:6.1f} C",
        f"  where the curve is zero       {still['curve_C']:6.1f} C",
    ]


def draw_curves(curves: Sequence[Mapping[str, Any]]) -> Figure:
    """Efficiency against reduced temperature, one line a collector; of one alone, also where the sunlight goes.

    Parameters
    ----------
    curves
        As the study gives them.

    Returns
    -------
    Figure
        For a data sheet.
    """
    from matplotlib.figure import Figure

    figure = Figure(figsize=(8.0, 5.0), layout="constrained", facecolor="white")
    axes = figure.add_subplot()
    axes.spines[["top", "right"]].set_visible(False)
    axes.grid(color=FAINT, linewidth=0.6)
    axes.set_axisbelow(True)
    for number, curve in enumerate(curves):
        colour, dash = LINES[number % len(LINES)]
        x, y = _line(curve)
        axes.plot(x, y, color=colour, linestyle=dash, linewidth=2.0, label=_label(curve))
        points = [(point["reduced_m2K_W"], point["efficiency"]) for point in curve["points"]]
        axes.plot(*zip(*points, strict=True), "o", color=colour, markersize=4.5, markerfacecolor="white", zorder=4)
    if len(curves) == 1:
        _explain(axes, curves[0])
    axes.set_xlim(left=-0.0006)
    axes.set_ylim(0.0, 1.0)
    axes.set_xlabel("(mean fluid - air) / irradiance, m²K/W")
    axes.set_ylabel("efficiency, per area of length x width")
    figure.legend(frameon=False, fontsize=9, loc="outside lower left")
    figure.suptitle("Efficiency curve", fontsize=11, fontweight="bold", color=INK, x=0.01, ha="left")
    axes.set_title(_bench(curves[0], degree="°C", per="/m²"), fontsize=9, color=INK, loc="left")
    return figure


def _line(curve: Mapping[str, Any]) -> tuple[Any, Any]:
    x = np.linspace(0.0, curve["points"][-1]["reduced_m2K_W"], 100)
    g = curve["bench"]["irradiance_W_m2"]
    return x, curve["eta0"] - curve["a1_W_m2K"] * x - curve["a2_W_m2K2"] * g * x**2


def _label(curve: Mapping[str, Any]) -> str:
    return f"{curve['title']}: {curve['eta0']:.3f}, {curve['a1_W_m2K']:.2f} W/m²K, {curve['a2_W_m2K2']:.4f} W/m²K²"


def _explain(axes: Axes, curve: Mapping[str, Any]) -> None:
    """Shade what is lost by optics and as heat, and read off the working point."""
    x, y = _line(curve)
    at, g = curve["working_point"], curve["bench"]["irradiance_W_m2"]
    axes.fill_between(x, curve["eta0"], 1.0, color=OPTICAL, linewidth=0.0)
    axes.fill_between(x, y, curve["eta0"], color=HEAT, linewidth=0.0)
    place = at["above_air_K"] / g
    if place > x[-1]:
        return
    axes.plot([place, place], [0.0, 1.0], color=INK, linewidth=0.9)
    heights = {
        f"optical loss {at['optical_loss']:.3f}": 0.5 * (1.0 + curve["eta0"]),
        f"heat loss {at['heat_loss']:.3f}": curve["eta0"] - 0.5 * at["heat_loss"],
        f"efficiency {at['efficiency']:.3f}": 0.5 * at["efficiency"],
    }
    right = place < 0.7 * x[-1]
    for words, height in heights.items():
        axes.annotate(
            words, (place, height), xytext=(7 if right else -7, 0), textcoords="offset points", va="center",
            ha="left" if right else "right", fontsize=9, color=INK,
        )  # fmt: skip
    axes.annotate(
        f"{at['above_air_K']:g} K above the air", (place, 0.0), xytext=(7 if right else -7, 8), textcoords="offset points",
        ha="left" if right else "right", fontsize=9, color=INK,
    )  # fmt: skip
