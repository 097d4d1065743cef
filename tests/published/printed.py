"""A number as its source prints it, with the tolerance that goes with it."""

from __future__ import annotations

from decimal import Decimal
from typing import Any

import pytest


def printed(digits: str, *, claimed: float = 0.0) -> Any:
    """Equal within half of the last digit written, or within the accuracy that the source claims if that is wider."""
    half = 0.5 * 10.0 ** Decimal(digits).as_tuple().exponent
    return pytest.approx(float(digits), abs=max(half, claimed))


def row(digits: str) -> list[Any]:
    """Several numbers of one printed line."""
    return [printed(one) for one in digits.split()]
