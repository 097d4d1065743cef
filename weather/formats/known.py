"""Which formats there are, and how each is known by its content."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from typing import NamedTuple

from weather.errors import InputError, Problem
from weather.formats.raw import Raw

__all__ = ["ALLOWED", "FORMATS", "Format", "recognise"]

ALLOWED = "TMY3, TMY2, EPW, a European typical year (PVGIS) in CSV or JSON, an American satellite table (NSRDB)"


class Format(NamedTuple):
    """A format's name, whether a file's first two lines are its, and the name of its reader's module and function."""

    name: str
    fits: Callable[[str, str], bool]
    reader: tuple[str, str]

    def read(self, text: str, path: Path) -> Raw:
        """Return the file's rows; the reader is loaded when it is needed."""
        from importlib import import_module

        module, function = self.reader
        found: Raw = getattr(import_module(f"weather.formats.{module}"), function)(text, path)
        return found


FORMATS = (
    Format("EPW", lambda first, _: first.upper().startswith("LOCATION,"), ("epw", "read_epw")),
    Format("TMY3", lambda _, second: second.startswith("Date (MM/DD/YYYY)"), ("tmy3", "read_tmy3")),
    Format(
        "TMY2",
        lambda _, second: len(second) >= 140 and second[1:9].replace(" ", "0").isdigit() and "," not in second,
        ("tmy2", "read_tmy2"),
    ),
    Format(
        "European typical year (PVGIS), CSV",
        lambda first, _: first.startswith("Latitude (decimal degrees):"),
        ("pvgis", "read_pvgis_csv"),
    ),
    Format(
        "European typical year (PVGIS), JSON",
        lambda first, second: f"{first}{second}".lstrip().startswith("{") and '"inputs"' in f"{first}{second}"[:400],
        ("pvgis", "read_pvgis_json"),
    ),
    Format(
        "American satellite table (NSRDB)",
        lambda first, _: first.startswith("Source,Location ID,"),
        ("nsrdb", "read_nsrdb"),
    ),
    Format(
        "American satellite table (NSRDB), bare",
        lambda first, _: "Year,Month,Day,Hour,Minute," in first and "GHI" in first,
        ("nsrdb", "read_nsrdb_bare"),
    ),
)


def recognise(text: str, *, file: str) -> Format:
    """Format of a file, by what its first two lines hold.

    Parameters
    ----------
    text
        The file's content.
    file
        For messages.

    Returns
    -------
    Format
        The first that fits.

    Raises
    ------
    InputError
        None fits.
    """
    first, _, rest = text.partition("\n")
    second = rest.partition("\n")[0]
    for each in FORMATS:
        if each.fits(first, second):
            return each
    do = "for another table in CSV name its columns in the scenario, under [place.columns]"
    what = "weather file of unknown format"
    raise InputError(Problem(where=f"{file}:1", what=what, got=repr(first[:60]), allowed=ALLOWED, do=do))
