"""The one error a user meets: what is wrong, where, what was given, what is allowed, what to do."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

__all__ = ["InputError", "Problem"]


@dataclass(frozen=True, kw_only=True)
class Problem:
    """One fault in what the user gave.

    Parameters
    ----------
    where
        File, with line or row where known, or the option of the command.
    what
        The key, column or quantity, and what is the matter with it.
    got
        The value given, with its unit; empty if nothing was given.
    allowed
        What would have been accepted.
    do
        What the user can do about it.
    """

    where: str
    what: str
    got: str = ""
    allowed: str = ""
    do: str = ""

    def __str__(self) -> str:
        details = [f"got {self.got}" if self.got else "", f"allowed: {self.allowed}" if self.allowed else "", self.do]
        return "; ".join([f"{self.where}: {self.what}", *[detail for detail in details if detail]])


class InputError(Exception):
    """Everything found wrong with one input, reported together.

    Parameters
    ----------
    problems
        The faults, in the order a reader of the file would meet them; at least one.
    """

    def __init__(self, problems: Problem | Sequence[Problem]) -> None:
        self.problems = (problems,) if isinstance(problems, Problem) else tuple(problems)
        super().__init__("\n".join(str(problem) for problem in self.problems))
