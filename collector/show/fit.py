"""A fit as text, and its residuals as a figure."""

from __future__ import annotations

from collections.abc import Mapping
from typing import TYPE_CHECKING, Any

from collector.show.tables import hung, remarks

if TYPE_CHECKING:
    from matplotlib.figure import Figure

__all__ = ["draw_residuals", "fit_text"]

INK, FAINT, POINT = "#22272b", "#d8dcdf", "#a3341f"


def fit_text(fit: Mapping[str, Any]) -> str:
    """A fit on a page; a value that the points do not support is not printed.

    Parameters
    ----------
    fit
        As the study gives it.

    Returns
    -------
    str
        Lines of at most 80 columns.
    """
    words = (
        "Coefficients of ISO 9806" if fit["kind"] == "report" else "Parameters of the build, through the heat balance"
    )
    lines = [
        f"{words}: {len(fit['terms'])} fitted, from {fit['points']} points",
        "",
        f"{'':<42} {'value':>10} {'std error':>10} {'t-ratio':>8}",
    ]
    lines += [_row(term) for term in fit["terms"]]
    lines += ["", f"  residuals rms {fit['rms_W_m2']:.2f} W/m2; intervals of {100 * fit['confidence']:.0f} %:"]
    for term in fit["terms"]:
        if term["value"] is not None:
            lines.append(f"    {term['name']:<38} {term['low']:10.4g} to {term['high']:.4g}")
    blocks = [lines, _told_apart(fit), _correlations(fit), *remarks([fit])]
    return "\n\n".join("\n".join(block) for block in blocks if block) + "\n"


def _row(term: Mapping[str, Any]) -> str:
    value = "not known" if term["value"] is None else f"{term['value']:.4g}"
    return (
        f"  {term['name']:<40} {value:>10} {min(term['standard_error'], 1e9):10.2g} {min(term['t_ratio'], 9999.0):8.1f}"
    )


def _told_apart(fit: Mapping[str, Any]) -> list[str]:
    said = [line for words in fit["cannot_tell"] for line in hung(words, head="  - ")]
    if fit["kind"] == "report" and any(not term["supported"] for term in fit["terms"]):
        said.append("  - --drop takes out, one by one, what is not supported")
    said += [f"  - dropped on request: {', '.join(fit['dropped'])}"] if fit["dropped"] else []
    return ["What these points can't tell", *(said or ["  - nothing of what was asked"])]


def _correlations(fit: Mapping[str, Any]) -> list[str]:
    names = [term["name"].rsplit(".", 1)[-1].split("_")[0][:8] for term in fit["terms"]]
    if len(names) < 2:
        return []
    lines = ["Correlations", "  " + " " * 8 + "".join(f"{name:>9}" for name in names)]
    lines += [
        f"  {name:<8}" + "".join(f"{value:9.3f}" for value in row[: place + 1])
        for place, (name, row) in enumerate(zip(names, fit["correlation"], strict=True))
    ]
    return lines


def draw_residuals(fit: Mapping[str, Any]) -> Figure:
    """Measured less fitted power over the mean fluid above air.

    Parameters
    ----------
    fit
        As the study gives it.

    Returns
    -------
    Figure
        With a band of twice the rms.
    """
    from matplotlib.figure import Figure

    figure = Figure(figsize=(8.0, 4.2), layout="constrained", facecolor="white")
    axes = figure.add_subplot()
    axes.spines[["top", "right"]].set_visible(False)
    axes.grid(color=FAINT, linewidth=0.6)
    axes.set_axisbelow(True)
    rms = fit["rms_W_m2"]
    axes.axhspan(-2.0 * rms, 2.0 * rms, color="#eef0f1", linewidth=0.0)
    axes.axhline(0.0, color=INK, linewidth=0.9)
    axes.plot(fit["above_air_K"], fit["residuals_W_m2"], "o", color=POINT, markersize=5.0)
    widest = max([2.6 * rms, *(1.15 * abs(value) for value in fit["residuals_W_m2"]), 1e-6])
    axes.set_ylim(-widest, widest)
    axes.set_xlabel("mean fluid above air, K")
    axes.set_ylabel("measured less fitted, W/m²")
    axes.set_title(
        f"{fit['points']} points, rms {rms:.2f} W/m²; band: twice the rms", fontsize=9, color=INK, loc="left"
    )
    figure.suptitle("Residuals of the fit", fontsize=11, fontweight="bold", color=INK, x=0.01, ha="left")
    return figure
