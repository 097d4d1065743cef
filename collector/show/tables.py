"""Results as text for a terminal 80 columns wide; plain ASCII, so that any pipe and any code page takes it."""

from __future__ import annotations

import textwrap
from collections.abc import Iterable, Mapping, Sequence
from typing import Any

import numpy as np

__all__ = [
    "catalogue_text",
    "check_text",
    "comparison_text",
    "hung",
    "models_text",
    "point_text",
    "remarks",
    "rounded_to_sum",
    "temperature_words",
    "year_text",
]

WIDTH = 80
MONTHS = ("Jan", "Feb", "Mar", "Apr", "May", "Jun", "Jul", "Aug", "Sep", "Oct", "Nov", "Dec")
PATHS = (  # where the sunlight went, in the order of its way through the collector
    ("optical_kWh_m2", "not absorbed by the plate (reflected, cover)"),
    ("idle_kWh_m2", "lost while the pump stands still"),
    ("top_convection_kWh_m2", "lost through the front by convection"),
    ("top_radiation_kWh_m2", "lost through the front by radiation"),
    ("back_kWh_m2", "lost through the back"),
    ("edge_kWh_m2", "lost through the edges"),
    ("stored_kWh_m2", "left in the collector at the year's end"),
    ("useful_kWh_m2", "HEAT DELIVERED"),
)
SHORTER = {
    "optical_kWh_m2": "not absorbed by the plate",
    "idle_kWh_m2": "lost while standing still",
    "stored_kWh_m2": "left at the year's end",
    "top_convection_kWh_m2": "lost in front by convection",
    "top_radiation_kWh_m2": "lost in front by radiation",
}
STEP_NAMES = {
    "tilted_sky": "tilted sky",
    "wind": "wind relation",
    "sky": "sky temperature",
    "diffuse": "diffuse optics",
}
BLOCK = 4  # runs side by side
RUN = Mapping[str, Any]


def rounded_to_sum(values: Sequence[float], *, digits: int, first: int | None = None) -> list[float]:
    """Parts rounded so that they add up to their rounded sum.

    Parameters
    ----------
    values
        Parts.
    digits
        After the point.
    first
        Place of a part that is rounded by itself, as it is where it stands alone; the others take up what remains.

    Returns
    -------
    list of float
        Each within one of the last digit of its value.
    """
    scale = 10.0**digits
    scaled = np.array(values, dtype=float) * scale
    down = np.floor(scaled)
    rest = down - scaled
    if first is not None:
        down[first], rest[first] = round(round(values[first], digits) * scale), 1.0  # never raised
    short = max(round(scaled.sum()) - int(down.sum()), 0)
    down[np.argsort(rest, kind="stable")[:short]] += 1.0
    return [float(value) / scale + 0.0 for value in down]


def year_text(run: RUN) -> str:
    """One run's year on a page.

    Parameters
    ----------
    run
        Account of the run.

    Returns
    -------
    str
        Lines of at most 80 columns.
    """
    blocks = [
        _head(run),
        _sunlight(run),
        _month_table(run),
        _sure(run),
        _hot(run),
        _sums(run),
        _basis(run),
        *remarks([run]),
    ]
    return "\n\n".join("\n".join(block) for block in blocks if block) + "\n"


def temperature_words(run: RUN) -> str:
    """The fluid temperature held, in words.

    Parameters
    ----------
    run
        Account of the run.

    Returns
    -------
    str
        Such as "inlet 40 C".
    """
    return f"inlet {run['inlet_C']:g} C" if "inlet_C" in run else f"mean fluid {run['mean_C']:g} C"


def _head(run: RUN) -> list[str]:
    weather, on = run["weather"], f"{run['hours_on']:5d}"
    north = f"{abs(weather['latitude_deg']):.2f} {'N' if weather['latitude_deg'] >= 0 else 'S'}"
    east = f"{abs(weather['longitude_deg']):.2f} {'E' if weather['longitude_deg'] >= 0 else 'W'}"
    lines = [
        *textwrap.wrap(run["title"], WIDTH),
        f"{temperature_words(run)}, {run['area_m2']:.1f} m2 of collector",
        *textwrap.wrap(f"{weather['place']}, {north} {east}", WIDTH),
        "",
        f"Heat of the year     {run['useful_kWh_m2']:8.1f} kWh/m2    {run['useful_kWh']:12,.0f} kWh    {on} h running",
    ]
    if (span := _span(run)) is not None:
        lines.append(f"  other relations    {span[0]:8.1f} to {span[1]:.1f} kWh/m2, see below")
    if "useful_kWh_m2_gross" in run:
        lines.append(
            f"  per gross area     {run['useful_kWh_m2_gross']:8.1f} kWh/m2    of {run['gross_area_m2']:.1f} m2 gross"
        )
    return lines


def _span(run: RUN) -> tuple[float, float] | None:
    found = [row["useful_kWh_m2"] for row in run["how_sure"] if not row["bound"]]
    return (min([*found, run["useful_kWh_m2"]]), max([*found, run["useful_kWh_m2"]])) if found else None


def _ways(run: RUN) -> list[float]:
    """Where the sunlight went, as printed: the heat is the one of the headline, and all add up."""
    keys = [key for key, _ in PATHS]
    return rounded_to_sum([run[key] for key in keys], digits=1, first=keys.index("useful_kWh_m2"))


def _sunlight(run: RUN) -> list[str]:
    rows = _ways(run)
    plane = max(sum(rows), 1e-9)
    longest = max(*(abs(value) for value in rows), 1e-9)
    lines = ["Where the year's sunlight went                     kWh/m2       %"]
    lines += _taken(run)
    lines.append(f"  {'sunlight on the plane':<46} {sum(rows):8.1f}   100.0")
    lines += [
        f"  {words:<46} {value:8.1f}  {100.0 * value / plane:6.1f}  {'#' * round(12 * max(value, 0.0) / longest)}".rstrip()
        for value, (_, words) in zip(rows, PATHS, strict=True)
    ]
    return lines


def _taken(run: RUN) -> list[str]:
    """A line above the sunlight on the plane, of which obstacles' part is none."""
    if (taken := run.get("obstacles")) is None:
        return []
    beam, diffuse = taken["beam_kWh_m2"], taken["diffuse_kWh_m2"]
    return [f"  {f'taken by horizon and rows (beam {beam:.1f})':<46} {beam + diffuse:8.1f}       -"]


def _obstacles(found: RUN | None) -> dict[str, str]:
    """A row for the obstacles, and what is not included in the result."""
    left_out = "pipes; stores; dirt; snow"
    if found is None:
        return {"not included": left_out.replace("dirt", "shading; dirt")}
    words = [f"horizon of {found['horizon']}"] if found["horizon"] else []
    words += [f"{found['rows']} rows"] if found["rows"] else []
    words += [f"{100.0 * found['sky_open']:.1f} % of the sky's view left", "obstacles as warm as the air"]
    words += [f"{100.0 * found['ground_open']:.1f} % of the ground's light"] if found["rows"] else []
    return {"obstacles": ", ".join(words).encode("ascii", "replace").decode("ascii"), "not included": left_out}


def _month_table(run: RUN) -> list[str]:
    lines = ["Month      plane     heat   heat/plane   running   heat"]
    lines.append("          kWh/m2   kWh/m2            %         h")
    longest = max(*(month["useful_kWh_m2"] for month in run["months"]), 1e-9)
    for name, month in zip(MONTHS, run["months"], strict=True):
        plane, heat = month["plane_kWh_m2"], month["useful_kWh_m2"]
        share = f"{100.0 * heat / plane:8.1f}" if plane > 0.0 else "       -"
        bar = "#" * round(26 * heat / longest)
        lines.append(f"{name:<6} {plane:9.1f} {heat:8.1f}     {share}   {month['hours_on']:7.0f}   {bar}".rstrip())
    return lines


def _sure(run: RUN) -> list[str]:
    if not run["how_sure"]:
        return []
    lines = ["How sure: the same year with another published relation, one at a time"]
    for row in run["how_sure"]:
        change = "      -" if row["change_pct"] is None else f"{round(row['change_pct'], 1) + 0.0:+6.1f} %"
        words = f"{row['to']} (a bound, not a relation)" if row["bound"] else row["to"]
        lines.append(
            f"  {STEP_NAMES.get(row['changed'], row['changed']):<17} {words:<40} {row['useful_kWh_m2']:8.1f} {change}"
        )
    lines.append("  Not in this spread: the weather of another year, and the maker's tolerances.")
    return lines


def _hot(run: RUN) -> list[str]:
    stopped = run["stagnation_plate_C"]
    lines = [
        f"Hottest plate        {run['hottest_plate_C']:5.1f} C as operated, {stopped:.1f} C if the pump never ran",
        "  hottest if stopped   mid-hour       plate C   on plane W/m2   air C  wind m/s",
    ]
    lines += [
        f"{'':<22} {row['time']:<14} {row['plate_C']:7.1f}   {row['plane_W_m2']:13.0f}   {row['air_C']:5.1f}  "
        f"{row['wind_m_s']:8.1f}"
        for row in run["hottest_hours"][:3]
    ]
    return lines


def _sums(run: RUN) -> list[str]:
    unsolved = (
        "all hours converged" if not run["unconverged_hours"] else f"{run['unconverged_hours']} h DID NOT CONVERGE"
    )
    return [
        "How the sums close",
        f"  sunlight less all that is listed above {run['unaccounted_kWh_m2']:9.1e} kWh/m2",
        f"  largest imbalance of any hour          {run['residual_max_W_m2']:9.1e} W/m2, {unsolved}",
    ]


def _basis(run: RUN) -> list[str]:
    weather, models = run["weather"], run["models"]
    coating = run.get("coating")
    rows = _coating(coating) | {
        "weather": f"{weather['file']}; {weather['format']}, {weather['hours']} h, GHI {weather['ghi_kWh_m2']:.1f}, "
        f"DNI {weather['dni_kWh_m2']:.1f}, DHI {weather['dhi_kWh_m2']:.1f} kWh/m2, air {weather['air_mean_C']:.1f} C",
        "time stamps": _stamps(weather),
        "wind": f"{weather['wind']}, mean {weather['wind_mean_m_s']:.1f} m/s",
        "ground": f"albedo {weather['albedo'] if isinstance(weather['albedo'], str) else format(weather['albedo'], 'g')}",
        "relations": ", ".join(f"{step} {name}" for step, name in _used(models, weather).items()),
        "heat held": _heat_held(run["heat_held"]),
        **_obstacles(run.get("obstacles")),
    }
    return ["What it rests on", *(line for name, words in rows.items() for line in hung(words, head=f"  {name:<13}"))]


def _used(models: RUN, weather: RUN) -> dict[str, str]:
    """Relations that the result rests on: a decomposition only where the file has global irradiance alone."""
    named = {step: name for step, name in models.items() if not isinstance(name, bool)}
    if "'" not in (weather.get("radiation_made") or ""):
        named.pop("decomposition", None)
    return named


def _coating(found: RUN | None) -> dict[str, str]:
    """A row for a coating known by its spectrum."""
    if found is None or not found["by_spectrum"]:
        return {}
    name = found["name"].encode("ascii", "replace").decode("ascii")
    values = (
        f"absorptance {found['absorptance']:.4f}, emittance {found['emittance']:.4f} at {found['emittance_at_C']:.1f} C"
    )
    return {"coating": f"{name}: {values}; {found['basis']}"}


def _heat_held(held: RUN) -> str:
    if held["capacity_kJ_m2K"] is None:
        return "not counted: give collector.capacity_kJ_m2K, or materials whose heat capacity is known"
    words = f"{held['capacity_kJ_m2K']:.1f} kJ/m2K from {held['from']}"
    return (
        words
        if held["warming_up_kWh_m2"] is None
        else f"{words}; warming up cost {held['warming_up_kWh_m2']:.1f} kWh/m2"
    )


def _stamps(weather: RUN) -> str:
    used, rule = weather["stamp_used_min"], weather["stamp_rule_min"]
    if weather["stamp_found_min"] is None:
        return f"{used:+.0f} min to mid-hour by the format's rule; closure can't tell"
    errors = f"error {weather['stamp_error_W_m2']:.1f} W/m2, {weather['stamp_error_unshifted_W_m2']:.1f} unshifted"
    return f"{weather['stamp_found_min']:+.1f} min to mid-hour by closure, format's rule {rule:+.0f}, used {used:+.1f} ({errors})"


def hung(words: str, *, head: str) -> list[str]:
    """Words folded at the page's width, hanging from a head.

    Parameters
    ----------
    words
        A sentence or a list.
    head
        What the first line begins with.

    Returns
    -------
    list of str
        Lines of at most 80 columns.
    """
    return textwrap.wrap(words, WIDTH, initial_indent=head, subsequent_indent=" " * len(head), break_on_hyphens=False)


def remarks(runs: Sequence[RUN]) -> list[list[str]]:
    """Notices and cautions, each once; of several runs, with the numbers of those that it is about.

    Parameters
    ----------
    runs
        Accounts with ``notices`` and ``cautions``.

    Returns
    -------
    list of list of str
        A block of lines each.
    """
    blocks = []
    for key, title in (("notices", "Filled, mended or out of range"), ("cautions", "Caution")):
        about: dict[str, list[str]] = {}
        for number, run in enumerate(runs, start=1):
            for remark in run.get(key, ()):
                about.setdefault(remark, []).append(str(number))
        said = [
            remark if len(numbers) == len(runs) else f"[{', '.join(numbers)}] {remark}"
            for remark, numbers in about.items()
        ]
        if said or key == "notices":
            lines = [line for remark in said or ["nothing"] for line in hung(remark, head="  - ")]
            blocks.append([title, *lines])
    return blocks


def comparison_text(runs: Sequence[RUN]) -> str:
    """Several runs side by side, four to a block.

    Parameters
    ----------
    runs
        Accounts, two or more.

    Returns
    -------
    str
        Lines of at most 80 columns.
    """
    legend = [
        line
        for number, run in enumerate(runs, start=1)
        for line in hung(f"{run['title']}, {temperature_words(run)}", head=f"{number:3d}  ")
    ]
    blocks = [legend]
    starts = range(0, len(runs), BLOCK)
    blocks += [_side_by_side(runs[start : start + BLOCK], first=start + 1) for start in starts]
    blocks += remarks(runs)
    blocks.append(["One run alone prints its whole page: months, spread, hottest hours, sources."])
    return "\n\n".join("\n".join(block) for block in blocks) + "\n"


def _side_by_side(runs: Sequence[RUN], *, first: int) -> list[str]:
    def row(words: str, cells: Iterable[str]) -> str:
        return f"{words:<36}" + "".join(f"{cell:>11}" for cell in cells)

    names = dict(PATHS) | SHORTER
    parts = [_ways(run) for run in runs]
    spans = [_span(run) or (run["useful_kWh_m2"],) * 2 for run in runs]
    lines = [row("kWh/m2 a year", (f"[{first + place}]" for place in range(len(runs))))]
    if any(run.get("obstacles") for run in runs):
        taken = [run.get("obstacles") or {"beam_kWh_m2": 0.0, "diffuse_kWh_m2": 0.0} for run in runs]
        cells = (f"{each['beam_kWh_m2'] + each['diffuse_kWh_m2']:.1f}" for each in taken)
        lines.append(row("taken by horizon and rows", cells))
    lines.append(row("sunlight on the plane", (f"{sum(part):.1f}" for part in parts)))
    lines += [row(f"  {names[key]}", (f"{part[place]:.1f}" for part in parts)) for place, (key, _) in enumerate(PATHS)]
    lines.append(row("  other relations, lowest", (f"{low:.1f}" for low, _ in spans)))
    lines.append(row("  other relations, highest", (f"{high:.1f}" for _, high in spans)))
    lines.append(row("heat of the whole field, kWh", (f"{run['useful_kWh']:.0f}" for run in runs)))
    lines.append(row("hours running", (f"{run['hours_on']}" for run in runs)))
    lines.append(row("hottest plate as operated, C", (f"{run['hottest_plate_C']:.1f}" for run in runs)))
    lines.append(row("hottest plate, pump never on, C", (f"{run['stagnation_plate_C']:.1f}" for run in runs)))
    lines.append(row("largest hourly imbalance, W/m2", (f"{run['residual_max_W_m2']:.0e}" for run in runs)))
    return lines


def point_text(point: RUN) -> str:
    """One operating point on a page.

    Parameters
    ----------
    point
        As the study gives it.

    Returns
    -------
    str
        Lines of at most 80 columns.
    """
    rows = [
        ("plate", "plate_C", "C", ".2f"),
        ("fluid inlet", "inlet_C", "C", ".2f"),
        ("fluid mean", "mean_C", "C", ".2f"),
        ("fluid outlet", "outlet_C", "C", ".2f"),
        ("irradiance on the plane", "irradiance_W_m2", "W/m2", ".1f"),
        ("absorbed by the plate", "absorbed_W_m2", "W/m2", ".1f"),
        ("useful gain", "useful_W_m2", "W/m2", ".1f"),
        ("efficiency", "efficiency", "", ".4f"),
        ("front, convection", "top_convection_W_m2", "W/m2", ".1f"),
        ("front, radiation", "top_radiation_W_m2", "W/m2", ".1f"),
        ("back", "back_W_m2", "W/m2", ".1f"),
        ("edge", "edge_W_m2", "W/m2", ".1f"),
        ("U front, slope at the plate", "U_top_W_m2K", "W/m2K", ".3f"),
        ("U all losses, slope", "U_loss_W_m2K", "W/m2K", ".3f"),
        ("U front, loss/(plate - air)", "U_top_secant_W_m2K", "W/m2K", ".3f"),
        ("U all, loss/(plate - air)", "U_loss_secant_W_m2K", "W/m2K", ".3f"),
        ("F', of the slope", "F_prime", "", ".4f"),
        ("F_R, of the slope", "F_R", "", ".4f"),
        ("imbalance", "residual_W_m2", "W/m2", ".1e"),
    ]
    lines = [*textwrap.wrap(point["title"], WIDTH), ""]
    lines += [f"  {words:<30} {_cell(point[key], form):>10} {unit}".rstrip() for words, key, unit, form in rows]
    for number, t_cover in enumerate(point["covers_C"], start=1):
        lines.insert(2 + number, f"  {f'cover {number} (1 is outermost)':<30} {t_cover:10.2f} C")
    blocks = [lines, *remarks([point])]
    return "\n\n".join("\n".join(block) for block in blocks) + "\n"


def _cell(value: float | None, form: str) -> str:
    return "-" if value is None else format(value, form)


def _taken_up(found: RUN) -> str:
    return "peak efficiency by the report" if found["by_report"] else "at normal incidence the plate takes up"


def check_text(found: RUN) -> str:
    """What a scenario comes to before it is solved.

    Parameters
    ----------
    found
        As the study gives it.

    Returns
    -------
    str
        Lines of at most 80 columns.
    """
    held = found["inlet_C"] if "inlet_C" in found else found["mean_C"]
    temperatures = ", ".join(f"{value:g}" for value in (held if isinstance(held, list) else [held]))
    lines = [
        *textwrap.wrap(found["title"], WIDTH),
        _verdict(found["weather"]),
        "",
        f"  {'inlet' if 'inlet_C' in found else 'mean fluid'} {temperatures} C, {found['area_m2']:.1f} m2 of collector",
        f"  {_taken_up(found)} {100 * found['normal_absorptance_plate']:.1f} % of the sunlight",
        f"  back {found['U_back_W_m2K']:.2f}, edges {found['U_edge_W_m2K']:.2f} W/m2K",
    ]
    blocks = [lines, _basis(found), *remarks([found])]
    return "\n\n".join("\n".join(block) for block in blocks) + "\n"


def _verdict(weather: RUN) -> str:
    grave = sum(each["severity"] != "note" for each in weather.get("findings", ()))
    if not grave:
        return "nothing wrong in the scenario or its weather"
    return f"nothing wrong in the scenario; {grave} finding{'s' if grave > 1 else ''} about its weather, see below"


def models_text(relations: Mapping[str, Mapping[str, str]]) -> str:
    """Every relation with its source.

    Parameters
    ----------
    relations
        Source by name, by step.

    Returns
    -------
    str
        Lines of at most 80 columns.
    """
    blocks = []
    for step, names in relations.items():
        title = "without a choice" if step == "fixed" else "fluid.name" if step == "fluid" else f"models.{step}"
        blocks.append([title, *(line for name, source in names.items() for line in hung(source, head=f"  {name:<20}"))])
    return "\n\n".join("\n".join(block) for block in blocks) + "\n"


def catalogue_text(shelves: Mapping[str, Mapping[str, Mapping[str, Any]]]) -> str:
    """Materials with their values and sources.

    Parameters
    ----------
    shelves
        Entries by name, by shelf.

    Returns
    -------
    str
        Lines of at most 80 columns.
    """
    lines = []
    for shelf, entries in shelves.items():
        lines += [shelf, ""]
        for name, entry in entries.items():
            values = ", ".join(f"{key} {value:g}" for key, value in entry.items() if not isinstance(value, str))
            lines += [f'  "{name}"', *hung(values, head="      ")]
            lines += [
                line
                for key in ("note", "source")
                if key in entry
                for line in hung(f"{key}: {entry[key]}", head="      ")
            ]
        lines.append("")
    return "\n".join(lines)
