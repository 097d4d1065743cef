"""Results on disk: each file whole or not at all."""

from __future__ import annotations

import csv
import io
import json
import os
import tempfile
from collections.abc import Callable, Iterable, Mapping, Sequence
from pathlib import Path
from typing import Any

from weather.errors import InputError, Problem

__all__ = ["csv_text", "json_text", "open_folder", "write_new", "write_whole"]


def json_text(content: Mapping[str, Any]) -> str:
    """One JSON object; a number that is no number is a bug and raises.

    Parameters
    ----------
    content
        Plain values.

    Returns
    -------
    str
        With a line end.
    """
    return json.dumps(content, indent=2, allow_nan=False, ensure_ascii=False) + "\n"


def csv_text(header: Sequence[str], rows: Iterable[Sequence[Any]]) -> str:
    """Comma-separated values.

    Parameters
    ----------
    header
        Column names, units in them.
    rows
        As long as the header.

    Returns
    -------
    str
        Numbers with up to seven significant digits.
    """
    buffer = io.StringIO()
    writer = csv.writer(buffer, lineterminator="\n")
    writer.writerow(header)
    writer.writerows([f"{value:.7g}" if isinstance(value, float) else value for value in row] for row in rows)
    return buffer.getvalue()


def open_folder(path: Path) -> None:
    """Make the folder for the results.

    Parameters
    ----------
    path
        May exist.

    Raises
    ------
    InputError
        It is a file, or can't be made or written to.
    """
    try:
        path.mkdir(parents=True, exist_ok=True)
        with tempfile.NamedTemporaryFile(dir=path):
            pass
    except OSError as fault:
        do = "name a folder that can be written to"
        raise InputError(
            Problem(where="--out", what=f"can't write there: {fault.strerror}", got=str(path), do=do)
        ) from None


def write_new(path: Path, text: str) -> None:
    """Write a text where there is nothing yet.

    Parameters
    ----------
    path
        The file's place.
    text
        Its content.

    Raises
    ------
    InputError
        There is something of this name, or it can't be written.
    """
    if os.path.lexists(path):
        what, do = "there is a file of this name already", "choose another name; nothing was changed"
        raise InputError(Problem(where=str(path), what=what, do=do))
    if not os.path.isdir(path.parent):  # noqa: PTH112 # pathlib's raises where the system refuses a path
        raise InputError(
            Problem(where=str(path), what="no such folder", got=str(path.parent), do="make the folder first")
        )
    write_whole(path, write=lambda place: place.write_text(text, encoding="utf-8"))


def write_whole(path: Path, *, write: Callable[[Path], object]) -> None:
    """Write a file beside its place and move it there when it is complete.

    Parameters
    ----------
    path
        The file's place.
    write
        Writes to the path it is given.

    Raises
    ------
    InputError
        The disk refuses; nothing is left behind.
    """
    try:
        handle, name = tempfile.mkstemp(dir=path.parent, prefix=f".{path.stem[:50]}-", suffix=path.suffix)
        os.close(handle)
        temporary = Path(name)
        try:
            write(temporary)
            temporary.chmod(0o644)
            temporary.replace(path)
        finally:
            temporary.unlink(missing_ok=True)
    except OSError as fault:
        raise InputError(
            Problem(where=str(path), what=f"can't be written: {fault.strerror}", do="nothing was left half")
        ) from None
