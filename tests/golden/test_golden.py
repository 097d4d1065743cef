"""Nothing moved by accident."""

from __future__ import annotations

import json

import pytest

from tests.golden.years import GOLDEN, fresh


def test_the_years_are_those_of_the_last_rewrite():
    kept = json.loads(GOLDEN.read_text(encoding="utf-8"))
    now = fresh()
    assert now.keys() == kept.keys()
    for name, runs in kept.items():
        for before, after in zip(runs, now[name], strict=True):
            assert after == pytest.approx(before, rel=2e-6, abs=2e-6), name
