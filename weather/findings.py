"""A finding of the checks of a weather file: what it is called, how grave it is, where, and what to do."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

from weather.errors import Problem

__all__ = ["Finding", "Severity", "stopping"]

Severity = Literal["note", "warn", "stop"]


@dataclass(frozen=True, kw_only=True)
class Finding:
    """One thing that the checks found.

    Parameters
    ----------
    name
        Short, for ``--accept``.
    severity
        "note": good to know; "warn": look at it; "stop": a year from it would most likely be wrong.
    what
        In words, with numbers.
    hours
        How many are concerned.
    first
        When first, by the file's own clock; empty if it is of the file as a whole.
    do
        What the user can do about it.
    """

    name: str
    severity: Severity
    what: str
    hours: int
    first: str = ""
    do: str = ""

    @property
    def sentence(self) -> str:
        """All of it in one line."""
        when = f", first at {self.first}" if self.first else ""
        return f"{self.name}: {self.what} ({self.hours} h{when})" + (f"; {self.do}" if self.do else "")

    def problem(self, *, file: str, accept: bool = True) -> Problem:
        """As a fault of the file.

        Parameters
        ----------
        file
            For the message.
        accept
            Whether the year could be computed nevertheless.

        Returns
        -------
        Problem
            In a user's words.
        """
        where = f"{file}, {self.first}" if self.first else file
        ways = [self.do, f"or take it as it is with --accept {self.name}, in a scenario place.accept" if accept else ""]
        return Problem(
            where=where,
            what=f"{self.name}: {self.what}",
            got=f"{self.hours} h",
            do=", ".join(way for way in ways if way),
        )


def stopping(findings: tuple[Finding, ...], *, accept: tuple[str, ...]) -> list[Finding]:
    """Findings that stop a year.

    Parameters
    ----------
    findings
        Of a file.
    accept
        Names that the user accepts.

    Returns
    -------
    list of Finding
        Grave and not accepted.
    """
    return [each for each in findings if each.severity == "stop" and each.name not in accept]
