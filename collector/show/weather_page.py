"""A weather file on a page of 80 columns."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

from collector.show.tables import MONTHS, hung

__all__ = ["weather_text"]

MARKS = {"stop": "STOP", "warn": "warn", "note": "note"}
MOST_GAPS = 12


def weather_text(found: Mapping[str, Any]) -> str:
    """What is in a weather file, what is wrong with it, and its sums.

    Parameters
    ----------
    found
        As the study gives it.

    Returns
    -------
    str
        Lines of at most 80 columns, in ASCII.
    """
    blocks = [_head(found), _findings(found["findings"]), _sums(found), _by_year(found["by_year"]), _mended(found)]
    text = "\n\n".join("\n".join(block) for block in blocks if block) + "\n"
    return text.encode("ascii", "replace").decode("ascii")


def _head(found: Mapping[str, Any]) -> list[str]:
    north = f"{abs(found['latitude_deg']):.3f} {'N' if found['latitude_deg'] >= 0 else 'S'}"
    east = f"{abs(found['longitude_deg']):.3f} {'E' if found['longitude_deg'] >= 0 else 'W'}"
    years, made = found["source_years"], found["radiation_made"]
    span = f"{years[0]}" if len(years) == 1 else f"{years[0]} to {years[-1]} ({len(years)} calendar years)"
    rows = {
        "place": f"{found['place']}, {north} {east}, {found['altitude_m']:g} m, UTC{found['utc_offset_h']:+g}",
        "format": found["format"],
        "step": f"{found['step_min']:g} min" + ("" if found["step_min"] == 60.0 else ", averaged to hours"),
        "span": f"{found['hours']} h from {found['first_mid']} to {found['last_mid']} (mid-hour); rows of {span}",
        "columns": ", ".join(found["columns"]) + (f"; {made}" if made else ""),
        "gaps": _gaps(found["gaps"]),
        "time stamps": _stamps(found),
    }
    return [
        *hung(found["file"], head=""),
        *(line for name, words in rows.items() for line in hung(words, head=f"  {name:<13}")),
    ]


def _gaps(gaps: Sequence[Mapping[str, Any]]) -> str:
    if not gaps:
        return "none"
    each = [f"{gap['column']} {gap['hours']} h from {gap['first']}" for gap in gaps[:MOST_GAPS]]
    more = f"; and {len(gaps) - MOST_GAPS} more" if len(gaps) > MOST_GAPS else ""
    return f"{len(gaps)}, the longest {max(gap['hours'] for gap in gaps)} h: {', '.join(each)}{more}"


def _stamps(found: Mapping[str, Any]) -> str:
    rule, used = found["stamp_rule_min"], found["stamp_used_min"]
    if found["stamp_found_min"] is None:
        return f"{used:+.1f} min to mid-hour by the format's rule; closure can't tell"
    return (
        f"{found['stamp_found_min']:+.1f} min to mid-hour by closure, {rule:+.1f} by the format's rule, {used:+.1f} used; closure "
        f"error {found['stamp_error_W_m2']:.1f} W/m2, {found['stamp_error_unshifted_W_m2']:.1f} unshifted"
    )


def _findings(findings: Sequence[Mapping[str, Any]]) -> list[str]:
    lines = ["Findings"]
    for each in findings:
        when = f", first {each['first']}" if each["first"] else ""
        words = f"{each['what']}; {each['hours']} h{when}" + (f"; {each['do']}" if each["do"] else "")
        lines += hung(f"{each['name']}: {words}", head=f"  {MARKS[each['severity']]}  ")
    return lines if findings else ["Findings", "  none"]


def _sums(found: Mapping[str, Any]) -> list[str]:
    per_year = " a year" if found["years"] > 1 else ""
    lines = [
        f"Sums{per_year}      GHI      DNI      DHI   air mean   min   max   wind mean   max",
        f"{'':{len(per_year) + 4}}   kWh/m2   kWh/m2   kWh/m2          C     C     C         m/s   m/s",
    ]
    lines += [_row(name, month, pad=len(per_year)) for name, month in zip(MONTHS, found["months"], strict=True)]
    lines.append(_row("Year", found, pad=len(per_year)))
    share = 100.0 * found["ghi_kWh_m2"] / found["clear_sky_kWh_m2"] if found["clear_sky_kWh_m2"] > 0.0 else 0.0
    lines.append(f"  {share:.0f} % of a clean sky without cloud, {found['clear_sky_kWh_m2']:.0f} kWh/m2")
    return lines


def _row(name: str, sums: Mapping[str, float], *, pad: int = 0) -> str:
    light = " ".join(f"{sums[f'{each}_kWh_m2']:8.1f}" for each in ("ghi", "dni", "dhi"))
    air = f"{sums['air_mean_C']:10.1f} {sums['air_min_C']:5.1f} {sums['air_max_C']:5.1f}"
    return f"{name:<{4 + pad}} {light} {air} {sums['wind_mean_m_s']:11.1f} {sums['wind_max_m_s']:5.1f}"


def _by_year(years: Sequence[Mapping[str, Any]]) -> list[str]:
    if not years:
        return []
    return ["Each calendar year", *(_row(str(each["year"]), each, pad=7) for each in years)]


def _mended(found: Mapping[str, Any]) -> list[str]:
    said = found["notices"]
    return ["Filled, mended or assumed", *(line for each in said or ["nothing"] for line in hung(each, head="  - "))]
