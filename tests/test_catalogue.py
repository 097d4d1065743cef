"""Every material has a source, reads as a scenario's value, and is physically possible."""

from __future__ import annotations

import numpy as np
import pytest

from collector.build.catalogue import SHELVES, shelf
from collector.build.scenario import AbsorberTable, CasingTable, CoverTable
from collector.physics.glazing import fresnel_slab, slab_from_normal

ENTRIES = [(kind, name) for kind in SHELVES for name in shelf(kind)]
PLATE = {"thickness_mm": 0.5, "tube_pitch_mm": 100.0, "tube_outer_mm": 10.0, "tube_inner_mm": 9.0}


@pytest.mark.parametrize(("kind", "name"), ENTRIES)
def test_every_entry_states_its_source(kind, name):
    assert len(shelf(kind)[name]["source"]) > 10 or shelf(kind)[name]["source"] == "from memory"


@pytest.mark.parametrize("name", shelf("covers"))
def test_covers_read_as_covers_and_let_light_through(name):
    CoverTable.model_validate({"glass": name, "gap_mm": 20.0})
    given = shelf("covers")[name]
    if "transmittance" in given:
        n, absorption = slab_from_normal(transmittance=given["transmittance"], reflectance=given["reflectance"])
    else:
        n, absorption = given["refractive_index"], given["extinction_per_m"] * given["thickness_mm"] / 1e3
    slab = fresnel_slab(np.zeros(1), refractive_index=n, absorption=absorption)
    if "transmittance" in given:
        assert slab.transmittance[0, 0] == pytest.approx(given["transmittance"], abs=1e-9)
        assert slab.reflectance[0, 0] == pytest.approx(given["reflectance"], abs=1e-9)
    said = [float(word) for word in given["note"].replace(";", " ").split() if word.startswith("0.")]
    if "normal transmittance" in given["note"]:
        assert slab.transmittance[0, 0] == pytest.approx(said[-1], abs=0.005)
    assert 0.5 < slab.transmittance[0, 0] < 1.0


@pytest.mark.parametrize("name", shelf("coatings"))
def test_coatings_read_as_coatings_and_stand_in_their_class(name):
    AbsorberTable.model_validate({"coating": name, "metal": "copper", **PLATE})
    assert 0.0 < shelf("coatings")[name]["emittance"] < 1.0
    assert shelf("coatings")[name]["absorptance"] > 0.85


@pytest.mark.parametrize("name", shelf("metals"))
def test_metals_read_as_plates(name):
    AbsorberTable.model_validate({"absorptance": 0.95, "emittance": 0.1, "metal": name, **PLATE})


@pytest.mark.parametrize("name", shelf("insulation"))
def test_insulation_reads_as_casing(name):
    CasingTable.model_validate(
        {
            "back_thickness_mm": 50.0, "back_insulation": name, "edge_thickness_mm": 20.0, "edge_insulation": name,
            "edge_height_mm": 80.0,
        }
    )  # fmt: skip
