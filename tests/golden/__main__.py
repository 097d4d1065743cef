"""Rewrite the golden years: `python -m tests.golden`. Say in the changelog what physical reason moved them."""

from __future__ import annotations

import json

from tests.golden.years import GOLDEN, fresh

if __name__ == "__main__":
    GOLDEN.write_text(json.dumps(fresh(), indent=1) + "\n", encoding="utf-8")
    print(f"written: {GOLDEN}")
