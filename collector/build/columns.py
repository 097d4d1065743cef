"""Columns of numbers as instruments write them: found among headers and comments, whatever separates them."""

from __future__ import annotations

import re
from collections.abc import Sequence
from pathlib import Path
from typing import NamedTuple

import numpy as np

from weather.errors import InputError, Problem
from weather.year import Floats

__all__ = ["Column", "Columns", "at_most", "read_columns", "words_of"]

SEPARATORS = ("\t", ";", ",", None)  # None: white space; in this order where two would fit
COMMENTS = ("#", "!", "//")
NUMBER = re.compile(r"[+-]?(\d+\.?\d*|\.\d+)([eE][+-]?\d+)?")
FAULTS_SHOWN = 10


class Column(NamedTuple):
    """What a column is called in messages, the words that may head it, and words that tell that it is something else."""

    name: str
    words: frozenset[str]
    others: frozenset[str] = frozenset()


class Columns(NamedTuple):
    """Numbers of the columns asked for, ``(rows, columns)``, the line of each row, the head of each column, what was noticed."""

    values: Floats
    lines: list[int]
    heads: list[str]
    notices: list[str]


class _Line(NamedTuple):
    number: int
    cells: list[str]


def read_columns(path: Path, *, wanted: Sequence[Column], kind: str) -> Columns:
    """Read the wanted columns of a text file.

    Cells are parted by tabs, semicolons, commas or white space; a decimal comma will do wherever the comma does not part
    the cells. Lines before the first row of numbers are headers. Columns are found by the words that head them, and
    without such words by their order.

    Parameters
    ----------
    path
        The file.
    wanted
        The columns, in the order in which a file without headers has them.
    kind
        What the file is called in messages.

    Returns
    -------
    Columns
        In the file's order and units.

    Raises
    ------
    InputError
        All faults together, in the file's order.
    """
    text, notices = _text(path, kind=kind)
    separator, first = _separator(text, count=len(wanted))
    names = " and ".join((", ".join(one.name for one in wanted[:-1]), wanted[-1].name))
    if first < 0:
        what, got = "no row of numbers", f"{len(text.splitlines())} lines"
        raise InputError(Problem(where=str(path), what=what, got=got, allowed=f"columns of {names}"))
    rows = [line for line in _lines(text, separator=separator) if line.number >= first]
    heads = _heads(text, separator=separator, first=first, count=len(rows[0].cells))
    _refuse_double_commas(rows[0], heads=heads, separator=separator, count=len(wanted), path=path)
    places, choices = _places(heads, wanted=wanted, path=path, line=first)
    values, faults = [], []
    for row in rows:
        found = [_number(row.cells[at] if at < len(row.cells) else "", separator=separator) for at in places]
        values.append([np.nan if one is None else one for one in found])
        faults += [
            _not_a_number(row, at=at, name=column.name, path=path)
            for at, column, one in zip(places, wanted, found, strict=True)
            if one is None
        ]
    if faults:
        raise InputError(at_most(faults))
    return Columns(np.array(values), [row.number for row in rows], [heads[at] for at in places], notices + choices)


def at_most(faults: Sequence[Problem]) -> list[Problem]:
    """The first few faults of a file, with a last one that counts the rest."""
    if len(faults) <= FAULTS_SHOWN:
        return list(faults)
    file = faults[0].where.rpartition(":")[0]
    return [*faults[:FAULTS_SHOWN], Problem(where=file, what=f"{len(faults) - FAULTS_SHOWN} more faults like these")]


def _text(path: Path, *, kind: str) -> tuple[str, list[str]]:
    try:
        raw = path.read_bytes()
    except OSError as fault:
        what = f"{kind} cannot be read: {fault.strerror}"
        raise InputError(Problem(where=str(path), what=what, do="check the path")) from None
    if b"\0" in raw:
        what = f"{kind} is not plain text"
        raise InputError(Problem(where=str(path), what=what, allowed="a text file in UTF-8", do="export it as CSV"))
    try:
        return raw.decode("utf-8-sig"), []
    except UnicodeDecodeError:
        return raw.decode("latin-1"), [f"{path.name}: not UTF-8, read as Latin-1"]


def _lines(text: str, *, separator: str | None) -> list[_Line]:
    """Lines that are neither empty nor comment, in cells; empty cells at the end of a line are dropped."""
    found = []
    for number, line in enumerate(text.splitlines(), start=1):
        if (bare := line.strip()) and not bare.startswith(COMMENTS):
            found.append(_Line(number, _cells(line, separator=separator)))
    return found


def _cells(line: str, *, separator: str | None) -> list[str]:
    cells = [cell.strip().strip('"').strip() for cell in line.split(separator)]
    while cells and not cells[-1]:
        cells.pop()
    return cells


def _number(cell: str, *, separator: str | None) -> float | None:
    """The number in a cell; None if it holds anything else, names of infinity and of no number included."""
    if separator != "," and "." not in cell:
        cell = cell.replace(",", ".", 1)
    return float(cell) if NUMBER.fullmatch(cell) else None


def _separator(text: str, *, count: int) -> tuple[str | None, int]:
    """What parts the cells of most rows, and the first row's line; -1 if there is none."""
    best: tuple[int, str | None, int] = (0, None, -1)
    for separator in SEPARATORS:
        numeric = [
            line.number
            for line in _lines(text, separator=separator)
            if sum(_number(cell, separator=separator) is not None for cell in line.cells) >= count
        ]
        if len(numeric) > best[0]:
            best = (len(numeric), separator, numeric[0])
    return best[1], best[2]


def _heads(text: str, *, separator: str | None, first: int, count: int) -> list[str]:
    """What stands over each column: the last two header lines in cells, or without any the comment right above the numbers."""
    above = [line for line in _lines(text, separator=separator) if line.number < first and len(line.cells) > 1]
    if not above and first > 1:
        comment = text.splitlines()[first - 2].strip().lstrip("#!/ ")
        above = [_Line(first - 1, _cells(comment, separator=separator))]
    cells = [line.cells + [""] * count for line in above[-2:]]
    return [" ".join(line[at] for line in cells).strip() for at in range(count)]


def words_of(head: str) -> frozenset[str]:
    """Words of a head in small letters, with the two Greek letters mu as u."""
    plain = head.lower().replace("\u00b5", "u").replace("\u03bc", "u").replace("\u207b\u00b9", "-1").replace("^", "")
    return frozenset(re.findall(r"cm-1|1/cm|%|[a-z\u03bb\u03c1]+", plain))


def _refuse_double_commas(row: _Line, *, heads: list[str], separator: str | None, count: int, path: Path) -> None:
    """Commas between the columns and within the numbers can't be told apart; each number would be read as two."""
    if separator == "," and len(row.cells) == 2 * count and not all(heads) and "." not in "".join(row.cells):
        got, do = repr(",".join(row.cells)), "part the columns by semicolons, or use decimal points"
        what = "commas both within the numbers and between them"
        raise InputError(Problem(where=f"{path}:{row.number}", what=what, got=got, do=do))


def _places(heads: list[str], *, wanted: Sequence[Column], path: Path, line: int) -> tuple[list[int], list[str]]:
    """Where each wanted column stands, by its head or else by its order; and which of several that fit was taken."""
    words = [words_of(head) for head in heads]
    places: list[int] = []
    said = []
    for order, column in enumerate(wanted):
        free = [at for at in range(len(heads)) if at not in places]
        fitting = [at for at in free if words[at] & column.words and not words[at] & column.others]
        if not fitting and (len(heads) > len(wanted) or words[order] & column.others):
            got = f"{len(heads)} columns" + (
                f" headed {', '.join(map(repr, heads))}" if any(heads) else " without heads"
            )
            do = f"head one of them '{column.name}', or leave the others out"
            what = f"cannot tell which column is the {column.name}"
            raise InputError(Problem(where=f"{path}:{line}", what=what, got=got, do=do))
        if len(fitting) > 1:
            several = " and ".join(repr(heads[at]) for at in fitting)
            said.append(f"{path.name}: columns {several} could each be the {column.name}; the first is taken")
        places.append(fitting[0] if fitting else free[0])
    return places, said


def _not_a_number(row: _Line, *, at: int, name: str, path: Path) -> Problem:
    got = repr(row.cells[at]) if at < len(row.cells) and row.cells[at] else "nothing"
    do = "mend or delete the line; notes begin with #"
    return Problem(where=f"{path}:{row.number}", what=f"{name} is not a number", got=got, do=do)
