"""Coatings against each other as text, 80 columns wide, plain ASCII."""

from __future__ import annotations

import textwrap
from collections.abc import Mapping
from typing import Any

from collector.show.surface_tables import said_blocks
from collector.show.tables import temperature_words

__all__ = ["COATING_COLUMNS", "coating_rows", "coatings_text"]

WIDTH = 80
COATING_COLUMNS = (
    "coating", "name", "absorptance", "emittance", "emittance_at_C", "useful_kWh_m2", "useful_low_kWh_m2",
    "useful_high_kWh_m2", "rank", "difference_kWh_m2", "difference_low_kWh_m2", "difference_high_kWh_m2",
    "order_probability", "exchange", "stagnation_plate_C", "hours_above", "hours_above_operated", "worth_per_m2",
    "worth_low_per_m2", "worth_high_per_m2", "aged_useful_kWh_m2", "equivalent_operated_h", "equivalent_never_run_h",
)  # fmt: skip
Row = Mapping[str, Any]


def coatings_text(found: Row) -> str:
    """A comparison of coatings on a page.

    Parameters
    ----------
    found
        Account of the comparison.

    Returns
    -------
    str
        Lines of at most 80 columns.
    """
    blocks = [
        _head(found),
        _heat(found),
        _hot(found),
        _exchange(found),
        _worth(found),
        _ageing(found),
        _equivalent(found),
        _temperatures(found),
        _basis(found),
        *said_blocks(found),
    ]
    return "\n\n".join("\n".join(block) for block in blocks if block) + "\n"


def coating_rows(found: Row) -> list[list[Any]]:
    """Rows of the table for a file.

    Parameters
    ----------
    found
        Account of the comparison.

    Returns
    -------
    list of list
        Values of ``COATING_COLUMNS``; empty where something was not asked.
    """
    rows = []
    for row in found["coatings"]:
        flat = dict(row) | {
            "useful_low_kWh_m2": row["useful_interval_kWh_m2"][0],
            "useful_high_kWh_m2": row["useful_interval_kWh_m2"][1],
            "difference_low_kWh_m2": row["interval_kWh_m2"][0],
            "difference_high_kWh_m2": row["interval_kWh_m2"][1],
        }
        flat |= dict(zip(("worth_low_per_m2", "worth_high_per_m2"), row.get("worth_interval_per_m2", ()), strict=False))
        flat |= {"aged_useful_kWh_m2": row.get("aged", {}).get("useful_kWh_m2")}
        flat |= {f"equivalent_{key}": value for key, value in row.get("equivalent", {}).items()}
        rows.append(["" if flat.get(key) is None else flat[key] for key in COATING_COLUMNS])
    return rows


def _head(found: Row) -> list[str]:
    where = f"{temperature_words(found)}, {found['area_m2']:.1f} m2 of collector, {found['weather']['place']}"
    lines = [*textwrap.wrap(f"Coatings on: {_ascii(found['title'])}", WIDTH), *textwrap.wrap(_ascii(where), WIDTH), ""]
    for row in found["coatings"]:
        lines += _hung(f"{_ascii(row['name'])}: {row['basis']}", head=f"{row['coating']:3d}  ")
    return lines


def _heat(found: Row) -> list[str]:
    lines = [
        "     absorp-   emit-      heat of the year          difference to 1     order",
        "       tance   tance  kWh/m2  rank            kWh/m2   95 % interval   is real",
    ]
    for row in found["coatings"]:
        line = f"{row['coating']:3d} {row['absorptance']:8.4f} {row['emittance']:7.4f} {row['useful_kWh_m2']:7.1f} {row['rank']:5d}"
        if row["order_probability"] is not None:
            low, high = row["interval_kWh_m2"]
            line += f"  {row['difference_kWh_m2']:+16.1f}  {low:+7.1f} {high:+7.1f}  {100 * row['order_probability']:6.1f} %"
        lines.append(line)
    at = sorted(row["emittance_at_C"] for row in found["coatings"])
    asked = found["asked"]
    words = (
        f"Emittance at the running hours' mean plate temperature, {_span(at[0], at[-1])} C. Intervals from {asked['draws']} "
        f"draws with standard uncertainties of {asked['sigma_alpha']:g} in absorptance and {asked['sigma_eps']:g} in "
        "emittance, for each coating by itself. 'Order is real': share of the draws in which the difference has its sign."
    )
    return [*lines, *_hung(words, head="  ")]


def _span(low: float, high: float) -> str:
    return f"{low:.0f}" if f"{low:.0f}" == f"{high:.0f}" else f"{low:.0f} to {high:.0f}"


def _hot(found: Row) -> list[str]:
    limit = f"{found['asked']['limit']:g} C"
    lines = [f"Pump never on     hottest plate C   hours above {limit:<8} as operated above {limit}"]
    lines += [
        f"{row['coating']:3d} {row['stagnation_plate_C']:28.1f} {row['hours_above']:17d} {row['hours_above_operated']:17d}"
        for row in found["coatings"]
    ]
    return lines


def _exchange(found: Row) -> list[str]:
    known = [row for row in found["coatings"] if row["exchange"] is not None]
    if not known:
        return []
    each = ", ".join(f"[{row['coating']}] {row['exchange']:.2f}" for row in known)
    words = f"In this collector and place one point (0.01) of emittance is worth so many points of absorptance: {each}"
    return _hung(words, head="")


def _worth(found: Row) -> list[str]:
    asked = found["asked"]
    if asked["price"] is None:
        return []
    lines = ["Present value of the difference to 1, per m2: the extra price that breaks even"]
    for row in found["coatings"][1:]:
        low, high = row["worth_interval_per_m2"]
        lines.append(
            f"{row['coating']:3d} {row['worth_per_m2']:+28.2f}     95 % interval {low:+10.2f} to {high:+10.2f}"
        )
    words = (
        f"At {asked['price']:g} per kWh for {asked['life']:g} years, discounted at {100 * asked['discount']:g} % a year: "
        f"{asked['annuity']:.2f} times the yearly value. In the money of the price."
    )
    return [*lines, *_hung(words, head="  ")]


def _ageing(found: Row) -> list[str]:
    asked = found["asked"]
    if asked["aged"] is None:
        return []
    verdict = "passes" if asked["criterion_passed"] else "does not pass"
    lines = ["Ageing                heat new    heat aged     change   kWh/m2 a year"]
    for row in found["coatings"]:
        aged = row["aged"]
        lines.append(
            f"{row['coating']:3d} {row['useful_kWh_m2']:26.1f} {aged['useful_kWh_m2']:12.1f} {aged['change_kWh_m2']:+10.1f}"
        )
    words = (
        f"Absorptance {asked['aged'][0]:+g}, emittance {asked['aged'][1]:+g}: performance criterion {asked['criterion']:.3f} "
        f"with a weight of {asked['weight']:g} on emittance, {verdict} (at most {asked['criterion_limit']:g}; ISO 22975-3:2014, "
        "weight from memory)."
    )
    return [*lines, *_hung(words, head="  ")]


def _equivalent(found: Row) -> list[str]:
    asked = found["asked"]
    if asked["test_temperature"] is None:
        return []
    lines = [f"Hours at {asked['test_temperature']:g} C that age as much as a year       as operated   pump never on"]
    for row in found["coatings"]:
        each = row["equivalent"]
        lines.append(f"{row['coating']:3d} {each['operated_h']:53.3g} {each['never_run_h']:15.3g}")
    return [*lines, *_hung(f"Arrhenius' law with {asked['activation']:g} kJ/mol.", head="  ")]


def _temperatures(found: Row) -> list[str]:
    """Of the first coating; the others' are in the JSON."""
    asked = found["asked"]
    if asked["aged"] is None and asked["test_temperature"] is None:
        return []
    lines = ["Plate of coating 1, C        running h   standing h   pump never on h"]
    lines += [
        f"  {row['from_C']:6.0f} to {row['to_C']:4.0f} {row['running_h']:20.0f} {row['standing_h']:12.0f}"
        f" {row['never_run_h']:17.0f}"
        for row in found["coatings"][0]["temperatures"]
    ]
    return lines


def _basis(found: Row) -> list[str]:
    fit = found["response"]
    rows = {
        "weather": f"{found['weather']['file']}; the same year for all",
        "intervals": f"from a polynomial through {fit['years']} years solved; largest error found {fit['error_kWh_m2']:.2g} kWh/m2",
        "uncertainty": "comparisons of laboratories: 0.002 to 0.005 in absorptance, 0.005 to 0.04 in emittance at high "
        "temperature (Caron et al. 2022); the defaults within them are common practice",
        "imbalance": f"{found['residual_max_W_m2']:.0e} W/m2 at most in any hour, {found['unconverged_hours']} h not converged",
    }
    return ["What it rests on", *(line for name, words in rows.items() for line in _hung(words, head=f"  {name:<13}"))]


def _ascii(words: str) -> str:
    return words.encode("ascii", "replace").decode("ascii")


def _hung(words: str, *, head: str) -> list[str]:
    return textwrap.wrap(words, WIDTH, initial_indent=head, subsequent_indent=" " * len(head), break_on_hyphens=False)
