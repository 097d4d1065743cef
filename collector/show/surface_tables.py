"""A surface's absorptance and emittance as text, 80 columns wide, plain ASCII."""

from __future__ import annotations

import textwrap
from collections.abc import Iterable, Mapping
from typing import Any

__all__ = ["EMITTANCE_COLUMNS", "emittance_rows", "said_blocks", "surface_text"]

WIDTH = 80
EMITTANCE_COLUMNS = ("t_C", "normal", "hemispherical", "short", "long", "least", "most")
TITLES = {"notices": "What was found and done", "cautions": "Caution"}


def surface_text(found: Mapping[str, Any]) -> str:
    """One surface on a page.

    Parameters
    ----------
    found
        Account of the surface.

    Returns
    -------
    str
        Lines of at most 80 columns.
    """
    turns = found["cut_off_um"]
    head = [
        *textwrap.wrap(_ascii(found["name"]), WIDTH),
        *hung(found["basis"], head=""),
        f"{found['from_um']:.3g} to {found['to_um']:.3g} um, {found['points']} points",
    ]
    sunlight = ["Sunlight (ASTM G173)     absorptance     lowest  highest    outside range %"]
    sunlight += [_absorptance_row(part, found["absorptance"][part]) for part in ("global", "direct")]
    where = "reflectance never rises past 0.5" if turns is None else f"reflectance rises past 0.5 at {turns:.2f} um"
    blocks = [head, [*sunlight, f"  {where}"], _heat(found), *said_blocks(found)]
    return "\n\n".join("\n".join(block) for block in blocks) + "\n"


def emittance_rows(found: Mapping[str, Any]) -> Iterable[list[Any]]:
    """Rows of the table of emittance.

    Parameters
    ----------
    found
        Account of the surface.

    Yields
    ------
    list
        Values of ``EMITTANCE_COLUMNS``; empty text where there is none.
    """
    for row in found["emittance"]:
        yield ["" if row[key] is None else row[key] for key in EMITTANCE_COLUMNS]


def said_blocks(found: Mapping[str, Any]) -> list[list[str]]:
    """Notices and cautions as blocks of lines.

    Parameters
    ----------
    found
        Account with both.

    Returns
    -------
    list of list of str
        Notices even where there are none.
    """
    return [
        [title, *(line for said in found[key] or ["nothing"] for line in hung(_ascii(said), head="  - "))]
        for key, title in TITLES.items()
    ]


def _absorptance_row(part: str, found: Mapping[str, float]) -> str:
    outside = 100.0 * (found["short"] + found["long"])
    return f"  {part:<22} {found['value']:11.4f} {found['least']:10.4f} {found['most']:8.4f} {outside:18.2f}"


def _heat(found: Mapping[str, Any]) -> list[str]:
    rows = found["emittance"]
    known = any(row["hemispherical"] is not None for row in rows)
    lines = [f"Heat    plate C   emittance   lowest  highest   outside range %{'   hemispherical' if known else ''}"]
    lines.append(f"                  of normal                       short   long{'       emittance' if known else ''}")
    for words, row in (
        ("working", found["working"]),
        ("stagn.", found["stagnation"]),
        *(("", each) for each in rows),
    ):
        line = (
            f"{words:<8}{row['t_C']:7.0f} {_told(row['normal']):>11} {row['least']:8.4f} {row['most']:8.4f}"
            f" {100.0 * row['short']:11.2f} {100.0 * row['long']:6.1f}"
        )
        lines.append(line + (f" {_told(row['hemispherical']):>15}" if known else ""))
    lines.append("Lowest, highest: nothing, or a black body's power, outside the measured range.")
    return lines


def _told(emittance: float | None) -> str:
    return "not known" if emittance is None else f"{emittance:.4f}"


def _ascii(words: str) -> str:
    return words.encode("ascii", "replace").decode("ascii")


def hung(words: str, *, head: str) -> list[str]:
    return textwrap.wrap(words, WIDTH, initial_indent=head, subsequent_indent=" " * len(head), break_on_hyphens=False)
