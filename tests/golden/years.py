"""The years of the three scenarios, to six digits. A change here needs a physical reason; agreement proves nothing."""

from __future__ import annotations

from pathlib import Path
from typing import Any

from collector.build.reading import read_scenario
from collector.study.account import runs_of

GOLDEN = Path(__file__).with_name("years.json")
SCENARIOS = Path(__file__).parents[2] / "scenarios"
KEPT = (
    "plane_kWh_m2", "absorbed_kWh_m2", "useful_kWh_m2", "top_convection_kWh_m2", "top_radiation_kWh_m2", "back_kWh_m2",
    "edge_kWh_m2", "idle_kWh_m2", "hours_on", "hottest_plate_C", "stagnation_plate_C",
)  # fmt: skip


def fresh() -> dict[str, list[dict[str, Any]]]:
    """The same numbers as computed now."""
    return {
        path.stem: [
            {key: float(f"{run.account[key]:.6g}") for key in KEPT}
            | {f"month {month['month']}": float(f"{month['useful_kWh_m2']:.6g}") for month in run.account["months"]}
            for run in runs_of(read_scenario(path), base=path.parent)
        ]
        for path in sorted(SCENARIOS.glob("*.toml"))
    }
