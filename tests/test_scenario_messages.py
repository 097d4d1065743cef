"""What a user is told about a scenario that can't be right: which line, which key, what was given, what is allowed."""

from __future__ import annotations

import math
from pathlib import Path
from typing import get_args

import pytest

from collector.build.catalogue import SHELVES, shelf
from collector.build.reading import read_scenario
from collector.build.scenario import CHOICES, RIVALS, FluidTable, ModelsTable, Scenario
from collector.physics.fluids import FLUIDS, freezing_point
from weather.errors import InputError

ROOT = Path(__file__).parents[1]
STARTER = ROOT / "collector" / "build" / "data" / "starter.toml"
SCENARIOS = sorted((ROOT / "scenarios").glob("*.toml"))
SOUND = """\
title = "Bench for messages"

[place]
weather = "greensboro"
albedo = 0.25

[mounting]
tilt_deg = 35.0
azimuth_deg = 190.0

[collector]
modules = 3
length_m = 1.9
width_m = 1.0

[[collector.cover]]
glass = "low-iron 4 mm"
gap_mm = 22.0

[[collector.cover]] # inner
transmittance = 0.88
reflectance = 0.09
emittance = 0.86
gap_mm = 27.0

[collector.absorber]
absorptance = 0.93
emittance = 0.07
metal = "copper"
thickness_mm = 0.3
tube_pitch_mm = 120.0
tube_outer_mm = 12.0
tube_inner_mm = 10.5

[collector.casing]
back_thickness_mm = 60.0
back_insulation = "mineral wool"
edge_thickness_mm = 20.0
edge_conductivity_W_mK = 0.045
edge_height_mm = 90.0

[fluid]
name = "water"
mass_fraction = 0.0
flow_kg_s_m2 = 0.018

[operation]
inlet_C = 45.0

[models]
wind = "mcadams"
sky = "brunt"
"""
COATING_SETS = "absorptance with emittance, or coating, or reflectance_csv, or stack"
COVER_SETS = "refractive_index with extinction_per_m with thickness_mm, or transmittance with reflectance, or glass"


def altered(*changes: tuple[str, str]) -> str:
    """The sound text with each fragment, which must stand in it once, replaced."""
    text = SOUND
    for old, new in changes:
        assert text.count(old) == 1, f"{old!r} stands {text.count(old)} times"
        text = text.replace(old, new)
    return text


def line_of(text: str, start: str, *, nth: int = 1) -> int:
    """Line, from 1, of the nth one that begins so."""
    return [number for number, line in enumerate(text.splitlines(), start=1) if line.startswith(start)][nth - 1]


@pytest.fixture
def told(tmp_path):
    """What reading this text says, a string a fault; the file goes by `it.toml`."""

    def tell(text: str | bytes, *overrides: str) -> list[str]:
        path = tmp_path / "it.toml"
        path.write_bytes(text if isinstance(text, bytes) else text.encode())
        with pytest.raises(InputError) as caught:
            read_scenario(path, overrides=overrides)
        return [str(problem).replace(f"{tmp_path}/", "") for problem in caught.value.problems]

    return tell


@pytest.fixture
def accepted(tmp_path):
    """The scenario that this text comes to."""

    def read(text: str, *overrides: str) -> Scenario:
        path = tmp_path / "it.toml"
        path.write_text(text, encoding="utf-8")
        return read_scenario(path, overrides=overrides)

    return read


# --- files that are not read at all


def test_missing_file(tmp_path):
    path = tmp_path / "nowhere.toml"
    with pytest.raises(InputError) as caught:
        read_scenario(path)
    assert str(caught.value) == (
        f"{path}: scenario file cannot be read: No such file or directory; "
        "check the path, or write a starter with `noonplate new`"
    )


def test_a_folder_for_a_file(tmp_path):
    with pytest.raises(InputError) as caught:
        read_scenario(tmp_path)
    assert str(caught.value).startswith(f"{tmp_path}: scenario file cannot be read: Is a directory; ")


@pytest.mark.parametrize("encoding", ["latin-1", "utf-16"])
def test_not_utf8(told, encoding):
    text = SOUND.replace("Bench", "B\u00e4nk").encode(encoding)
    assert told(text) == ["it.toml: scenario file is not UTF-8 text; allowed: a TOML file in UTF-8"]


def test_a_byte_order_mark_is_no_fault(accepted):
    assert accepted("\ufeff" + SOUND).title == "Bench for messages"


@pytest.mark.parametrize(
    ("old", "new", "at", "words"),
    [
        ("tilt_deg = 35.0", "tilt_deg = 35,0", "tilt_deg", "Expected newline or end of document after a statement"),
        ('"greensboro"', "greensboro", "weather", "Invalid value"),
        ("[fluid]", "[fluid", "[fluid", "Expected ']' at the end of a table declaration"),
        ('"brunt"', '"brunt', "sky", "Illegal character '\\n'"),
        ("albedo = 0.25", "albedo = 0.25\nalbedo = 0.3", "albedo = 0.3", "Cannot overwrite a value"),
    ],
    ids=["decimal comma", "no quotes", "open bracket", "open quote", "key twice"],
)
def test_broken_toml(told, old, new, at, words):
    text = altered((old, new))
    (message,) = told(text)
    assert message.startswith(f"it.toml:{line_of(text, at)}: not valid TOML: {words}; ")
    assert message.endswith("; text in quotes, decimals with a point, one key a line")


def test_toml_that_ends_early_has_no_line(told):
    (message,) = told("title = ")  # Python's reader says "at end of document" here and names no line
    assert message.startswith("it.toml: not valid TOML: Invalid value; ")


TOO_MUCH = {
    "5000 digits": ("1" * 5000, "a number of too many digits"),
    "3000 brackets": ("[" * 3000 + "]" * 3000, "brackets or tables nested too deep"),
}


@pytest.mark.parametrize(("value", "words"), TOO_MUCH.values(), ids=TOO_MUCH)
def test_toml_that_python_itself_refuses(told, value, words):
    do = "text in quotes, decimals with a point, one key a line"
    assert told(altered(("modules = 3", f"modules = {value}"))) == [f"it.toml: not valid TOML: {words}; {do}"]
    assert told(SOUND, f"collector.modules={value}") == [f"--set: not valid TOML: {words}; {do}"]


@pytest.mark.parametrize(
    ("value", "got"),
    [
        ("9" * 4000, "9" * 57 + "..."),
        ("0x" + "f" * 20000, "more than can be shown"),
        ("{" + "a." * 3000 + "a = 1}", "more than can be shown (a table)"),
        ("1e999", "inf"),
    ],
    ids=["4000 digits", "20000 hexadecimal digits", "3000 tables deep", "1e999"],
)
def test_values_too_large_to_be_shown(told, value, got):
    (message,) = told(altered(("width_m = 1.0", f"width_m = {value}")))
    assert message.startswith(f"it.toml:{line_of(SOUND, 'width_m')}: collector.width_m: ")
    assert f"; got {got}; allowed: 0.05 to 30 m" in message


# --- one fault each: fragment replaced, what stands there instead, start of the line that must be named, the message


FAULTS = {
    "key missing": (
        "tilt_deg = 35.0\n", "", "[mounting]",
        "mounting.tilt_deg: required key missing; allowed: 0 to 90 deg",
    ),
    "whole number key missing": (
        "modules = 3\n", "", "[collector]",
        "collector.modules: required key missing; allowed: 1 to 100000",
    ),
    "title missing": (
        'title = "Bench for messages"\n', "", None,
        "title: required key missing; allowed: text",
    ),
    "unknown key, near another": (
        "azimuth_deg = 190.0", "azimuth_deg = 190.0\nwind_facter = 0.5", "wind_facter",
        "mounting.wind_facter: unknown key; did you mean wind_factor?",
    ),
    "unknown key, near none": (
        "azimuth_deg = 190.0", "azimuth_deg = 190.0\nqqq = 0.5", "qqq",
        ("mounting.qqq: unknown key; "
        "allowed: tilt_deg, azimuth_deg, wind_factor, wind_height_m, building_length_m, horizon_csv, rows"),
    ),
    "unknown table, near another": (
        "[models]", "[modles]", "[modles]",
        "modles: unknown key; did you mean models?",
    ),
    "unknown table, near none": (
        "[models]", "[qqq]", "[qqq]",
        "qqq: unknown key; allowed: title, place, mounting, collector, fluid, operation, models",
    ),
    "text for a number": (
        "length_m = 1.9", 'length_m = "1.9 m"', "length_m",
        "collector.length_m: wrong type; got '1.9 m' (text); allowed: 0.1 to 30 m",
    ),
    "bool for a number": (
        "flow_kg_s_m2 = 0.018", "flow_kg_s_m2 = true", "flow_kg_s_m2",
        "fluid.flow_kg_s_m2: wrong type; got True (true or false); allowed: 0.0005 to 0.5 kg/s m2",
    ),
    "list for a number": (
        "width_m = 1.0", "width_m = [1.0]", "width_m",
        "collector.width_m: wrong type; got [1.0] (a list); allowed: 0.05 to 30 m",
    ),
    "table for a number": (
        "width_m = 1.0", "width_m = {m = 1.0}", "width_m",
        "collector.width_m: wrong type; got {'m': 1.0} (a table); allowed: 0.05 to 30 m",
    ),
    "number for text": (
        'weather = "greensboro"', "weather = 27", "weather",
        "place.weather: wrong type; got 27; allowed: text",
    ),
    "fraction for a whole number": (
        "modules = 3", "modules = 2.5", "modules",
        "collector.modules: wrong type; got 2.5; allowed: 1 to 100000",
    ),
    "text for yes or no": (
        'sky = "brunt"', 'sky_pressure_term = "yes"', "sky_pressure_term",
        "models.sky_pressure_term: wrong type; got 'yes' (text); allowed: true or false",
    ),
    "too low": (
        "tube_pitch_mm = 120.0", "tube_pitch_mm = 2.9", "tube_pitch_mm",
        "collector.absorber.tube_pitch_mm: out of range; got 2.9; allowed: 3 to 1000 mm",
    ),
    "too high": (
        "tilt_deg = 35.0", "tilt_deg = 90.5", "tilt_deg",
        "mounting.tilt_deg: out of range; got 90.5; allowed: 0 to 90 deg",
    ),
    "none of it": (
        "modules = 3", "modules = 0", "modules",
        "collector.modules: out of range; got 0; allowed: 1 to 100000",
    ),
    "nan": (
        "back_thickness_mm = 60.0", "back_thickness_mm = nan", "back_thickness_mm",
        "collector.casing.back_thickness_mm: out of range; got nan; allowed: 1 to 500 mm",
    ),
    "inf": (
        "inlet_C = 45.0", "inlet_C = inf", "inlet_C",
        "operation.inlet_C: out of range; got inf; allowed: -50 to 200 C",
    ),
    "minus inf": (
        "inlet_C = 45.0", "inlet_C = -inf", "inlet_C",
        "operation.inlet_C: out of range; got -inf; allowed: -50 to 200 C",
    ),
    "place given outside the globe": (
        "albedo = 0.25", "albedo = 0.25\nlongitude = 181.0", "longitude",
        "place.longitude: out of range; got 181.0; allowed: -180 to 180 deg",
    ),
    "unknown name, near another": (
        '"mcadams"', '"mcadam"', "wind",
        ("models.wind: unknown name; got 'mcadam'; "
        "allowed: 'watmuff', 'mcadams', 'mitchell', 'jayamaha'; did you mean 'mcadams'?"),
    ),
    "unknown name, near none": (
        '"brunt"', '"zzz"', "sky",
        ("models.sky: unknown name; got 'zzz'; "
        "allowed: 'berdahl-martin', 'martin-berdahl', 'brunt', 'swinbank', 'measured', 'ambient'"),
    ),
    "number for a name": (
        '"mcadams"', "3", "wind",
        "models.wind: unknown name; got 3; allowed: 'watmuff', 'mcadams', 'mitchell', 'jayamaha'",
    ),
    "unknown fluid": (
        'name = "water"', 'name = "propylen glycol"', "name",
        ("fluid.name: unknown name; got 'propylen glycol'; "
        "allowed: 'water', 'propylene glycol', 'ethylene glycol'; did you mean 'propylene glycol'?"),
    ),
    "empty title": (
        '"Bench for messages"', '""', "title",
        "title: is empty; allowed: text",
    ),
    "inlet and mean together": (
        "inlet_C = 45.0", "inlet_C = 45.0\nmean_C = 50.0", "mean_C",
        "operation.mean_C: keys that exclude each other; got inlet_C, mean_C; allowed: inlet_C, or mean_C",
    ),
    "no temperature": (
        "inlet_C = 45.0", "", "[operation]",
        "operation.inlet_C: nothing given; allowed: inlet_C, or mean_C",
    ),
    "two ways for the wind": (
        "azimuth_deg = 190.0", "azimuth_deg = 190.0\nwind_factor = 0.5\nwind_height_m = 4.0", "wind_height_m",
        ("mounting.wind_height_m: keys that exclude each other; got wind_factor, wind_height_m; "
        "allowed: wind_factor, or wind_height_m"),
    ),
    "coating named and given": (
        "absorptance = 0.93", 'absorptance = 0.93\ncoating = "copper oxide"', "coating",
        ("collector.absorber.coating: keys that exclude each other; got absorptance, emittance, coating; "
        f"allowed: {COATING_SETS}"),
    ),
    "metal named and given": (
        'metal = "copper"', 'metal = "copper"\nconductivity_W_mK = 380.0', "metal",
        ("collector.absorber.metal: keys that exclude each other; got conductivity_W_mK, metal; "
        "allowed: conductivity_W_mK, or metal"),
    ),
    "back insulation named and given": (
        'back_insulation = "mineral wool"', 'back_insulation = "mineral wool"\nback_conductivity_W_mK = 0.04',
        "back_insulation",
        ("collector.casing.back_insulation: keys that exclude each other; "
        "got back_conductivity_W_mK, back_insulation; allowed: back_conductivity_W_mK, or back_insulation"),
    ),
    "edge insulation named and given": (
        "edge_conductivity_W_mK = 0.045", 'edge_conductivity_W_mK = 0.045\nedge_insulation = "plywood"',
        "edge_insulation",
        ("collector.casing.edge_insulation: keys that exclude each other; "
        "got edge_conductivity_W_mK, edge_insulation; allowed: edge_conductivity_W_mK, or edge_insulation"),
    ),
    "glass named and given": (
        'glass = "low-iron 4 mm"', 'glass = "low-iron 4 mm"\nthickness_mm = 4.0', "glass",
        ("collector.cover.0.glass: keys that exclude each other; got thickness_mm, glass; "
        f"allowed: {COVER_SETS}"),
    ),
    "coating in part": (
        "emittance = 0.07\n", "", "[collector.absorber]",
        ("collector.absorber.emittance: required key missing beside its companions; "
        f"allowed: {COATING_SETS}"),
    ),
    "cover in part": (
        "reflectance = 0.09\n", "", "[[collector.cover]] # inner",
        f"collector.cover.1.reflectance: required key missing beside its companions; allowed: {COVER_SETS}",
    ),
    "cover of nothing": (
        "transmittance = 0.88\nreflectance = 0.09\n", "", "[[collector.cover]] # inner",
        f"collector.cover.1.refractive_index: nothing given; allowed: {COVER_SETS}",
    ),
    "cover without emittance": (
        "emittance = 0.86\n", "", "[[collector.cover]] # inner",
        "collector.cover.1.emittance: required key missing; allowed: 0.01 to 1",
    ),
    "wrong in the second cover": (
        "gap_mm = 27.0", "gap_mm = 270.0", "gap_mm = 270.0",
        "collector.cover.1.gap_mm: out of range; got 270.0; allowed: 1 to 200 mm",
    ),
    "unknown key in the second cover": (
        "gap_mm = 27.0", "gap_mm = 27.0\nthicknes_mm = 3.0", "thicknes_mm",
        "collector.cover.1.thicknes_mm: unknown key; did you mean thickness_mm?",
    ),
    "no such glass": (
        '"low-iron 4 mm"', '"low-iron 5 mm"', "glass",
        f"collector.cover.0.glass: not in the catalogue; got 'low-iron 5 mm'; allowed: {', '.join(map(repr, shelf('covers')))}",
    ),
    "no such metal": (
        'metal = "copper"', 'metal = "cooper"', "metal",
        f"collector.absorber.metal: not in the catalogue; got 'cooper'; allowed: {', '.join(map(repr, shelf('metals')))}",
    ),
    "no such coating": (
        "absorptance = 0.93\nemittance = 0.07", 'coating = "soot"', "coating",
        f"collector.absorber.coating: not in the catalogue; got 'soot'; allowed: {', '.join(map(repr, shelf('coatings')))}",
    ),
    "no such back insulation": (
        '"mineral wool"', '"straw"', "back_insulation",
        ("collector.casing.back_insulation: not in the catalogue; got 'straw'; "
        f"allowed: {', '.join(map(repr, shelf('insulation')))}"),
    ),
    "no such edge insulation": (
        "edge_conductivity_W_mK = 0.045", 'edge_insulation = "hay"', "edge_insulation",
        ("collector.casing.edge_insulation: not in the catalogue; got 'hay'; "
        f"allowed: {', '.join(map(repr, shelf('insulation')))}"),
    ),
    "more light than there is": (  # 0.88 + 0.13 is above 1
        "reflectance = 0.09", "reflectance = 0.13", "transmittance",
        ("collector.cover.1.transmittance: no plane slab has this pair of normal transmittance and reflectance; "
        "got 0.88 with reflectance 0.13; allowed: together at most 1"),
    ),
    "tube without a wall": (
        "tube_inner_mm = 10.5", "tube_inner_mm = 12.0", "tube_inner_mm",
        "collector.absorber.tube_inner_mm: tube without a wall; got 12 mm; allowed: below tube_outer_mm, 12 mm",
    ),
    "tubes overlap": (
        "tube_pitch_mm = 120.0", "tube_pitch_mm = 11.5", "tube_outer_mm",
        "collector.absorber.tube_outer_mm: tubes overlap; got 12 mm; allowed: at most tube_pitch_mm, 11.5 mm",
    ),
    "gross area too small": (  # 1.9 m x 1.0 m
        "width_m = 1.0", "width_m = 1.0\ngross_area_m2 = 1.85", "gross_area_m2",
        ("collector.gross_area_m2: gross area smaller than the collector; got 1.85 m2; "
        "allowed: at least length x width, 1.9 m2"),
    ),
    "pitch wider than the collector": (
        "width_m = 1.0", "width_m = 0.115", "tube_pitch_mm",
        "collector.absorber.tube_pitch_mm: not one tube in the width; got 120 mm; allowed: at most width_m, 115 mm",
    ),
    "glycol in water": (
        "mass_fraction = 0.0", "mass_fraction = 0.3", "mass_fraction",
        "fluid.mass_fraction: mass fraction does not fit the fluid; got 0.3; allowed: 0 for water",
    ),
    "glycol without glycol": (
        'name = "water"', 'name = "ethylene glycol"', "mass_fraction",
        "fluid.mass_fraction: mass fraction does not fit the fluid; got 0; allowed: above 0 for ethylene glycol",
    ),
    "ice": (
        "inlet_C = 45.0", "inlet_C = -0.5", "inlet_C",
        "operation.inlet_C: the fluid is frozen; got -0.5 C; allowed: at least 0.0 C, where water begins to freeze",
    ),
    "ice at the coldest of a list": (
        "inlet_C = 45.0", "mean_C = [30.0, -4.0, 60.0]", "mean_C",
        "operation.mean_C: the fluid is frozen; got -4 C; allowed: at least 0.0 C, where water begins to freeze",
    ),
    "mitchell without a building": (
        '"mcadams"', '"mitchell"', "[mounting]",
        ("mounting.building_length_m: required key missing: models.wind = 'mitchell' needs it; "
        "allowed: the cube root of the building's volume in m"),
    ),
    "empty list": (
        "inlet_C = 45.0", "mean_C = []", "mean_C",
        "operation.mean_C: is empty; allowed: a number or a list of numbers, each -50 to 200 C",
    ),
    "text inside a list": (
        "inlet_C = 45.0", 'mean_C = [30.0, "warm"]', "mean_C",
        ("operation.mean_C.1: wrong type; got 'warm' (text); "
        "allowed: a number or a list of numbers, each -50 to 200 C"),
    ),
    "too hot inside a list": (
        "inlet_C = 45.0", "mean_C = [30.0, 201.0]", "mean_C",
        "operation.mean_C.1: out of range; got 201.0; allowed: a number or a list of numbers, each -50 to 200 C",
    ),
    "list too long": (
        "inlet_C = 45.0", f"mean_C = [{'30.0, ' * 51}]", "mean_C",
        "operation.mean_C: too many entries; got 51; allowed: at most 50",
    ),
    "too many covers": (
        "[collector.absorber]", '[[collector.cover]]\nglass = "window glass 3.2 mm"\ngap_mm = 20.0\n' * 2
        + "\n[collector.absorber]", "[[collector.cover]]",
        "collector.cover: too many entries; got 4; allowed: at most 3",
    ),
}  # fmt: skip


@pytest.mark.parametrize(("old", "new", "at", "message"), FAULTS.values(), ids=FAULTS)
def test_fault(told, old, new, at, message):
    text = altered((old, new))
    assert told(text) == [f"it.toml:{line_of(text, at)}: {message}" if at else f"it.toml: {message}"]


def test_number_where_a_table_belongs(told):
    text = altered(('[models]\nwind = "mcadams"\nsky = "brunt"\n', ""), ("[place]", "models = 3\n\n[place]"))
    assert told(text) == [f"it.toml:{line_of(text, 'models')}: models: wrong type; got 3"]


def test_single_brackets_around_a_cover(told):
    text = altered(("[[collector.cover]] # inner", "[collector.coover]")).replace(
        "[[collector.cover]]", "[collector.cover]"
    )
    messages = told(text.replace("[collector.coover]", "[collector.cover.x]"))
    line = line_of(text, "[collector.cover]")
    assert messages[0].startswith(f"it.toml:{line}: collector.cover: wrong type; got {{'glass': 'low-iron 4 mm', ")
    assert "(a table)" in messages[0]
    assert messages[0].endswith("; write [[collector.cover]] with double brackets: there may be several")


@pytest.mark.parametrize(("given", "got"), [("1.25", "1.25"), ("-0.1", "-0.1"), ("nan", "nan")])
def test_albedo_out_of_range(told, given, got):
    text = altered(("albedo = 0.25", f"albedo = {given}"))
    wanted = f"it.toml:{line_of(text, 'albedo')}: place.albedo: out of range; got {got}; allowed: 0 to 1, or 'file'"
    assert wanted in told(text)


def test_albedo_text(told):
    text = altered(("albedo = 0.25", 'albedo = "fiel"'))
    wanted = f"it.toml:{line_of(text, 'albedo')}: place.albedo: unknown name; got 'fiel'; allowed: 0 to 1, or 'file'; "
    assert wanted + "did you mean 'file'?" in told(text)


@pytest.mark.parametrize("given", ["1.25", '"fiel"', "true"])
def test_albedo_is_told_once(told, given):
    assert len(told(altered(("albedo = 0.25", f"albedo = {given}")))) == 1


def test_title_too_long(told):
    assert told(altered(("Bench for messages", "x" * 201))) == [
        "it.toml:1: title: too long; got 201 characters; allowed: at most 200 characters"
    ]


# --- several faults at once


def test_faults_come_together_in_the_order_of_the_file(told):
    text = altered(
        ("tilt_deg = 35.0", "tilt_deg = 95.0"),
        ("length_m = 1.9\n", ""),
        ("gap_mm = 22.0", "gap_mm = 0.5"),
        ("gap_mm = 27.0", 'gap_mm = "wide"'),
        ("thickness_mm = 0.3", "thicknes_mm = 0.3"),
        ("edge_height_mm = 90.0", "edge_height_mm = -1.0"),
        ("flow_kg_s_m2 = 0.018", "flow_kg_s_m2 = nan"),
        ("inlet_C = 45.0", "mean_C = [40.0, 300.0, false]"),
        ('"brunt"', '"bruntt"'),
    )
    allowed_mean = "allowed: a number or a list of numbers, each -50 to 200 C"
    assert told(text) == [
        f"it.toml:{line_of(text, 'tilt_deg')}: mounting.tilt_deg: out of range; got 95.0; allowed: 0 to 90 deg",
        f"it.toml:{line_of(text, '[collector]')}: collector.length_m: required key missing; allowed: 0.1 to 30 m",
        f"it.toml:{line_of(text, 'gap_mm')}: collector.cover.0.gap_mm: out of range; got 0.5; allowed: 1 to 200 mm",
        (
            f"it.toml:{line_of(text, 'gap_mm', nth=2)}: collector.cover.1.gap_mm: wrong type; got 'wide' (text); "
            "allowed: 1 to 200 mm"
        ),
        (
            f"it.toml:{line_of(text, '[collector.absorber]')}: collector.absorber.thickness_mm: required key missing; "
            "allowed: 0.05 to 20 mm"
        ),
        (
            f"it.toml:{line_of(text, 'thicknes_mm')}: collector.absorber.thicknes_mm: unknown key; "
            "did you mean thickness_mm?"
        ),
        (
            f"it.toml:{line_of(text, 'edge_height_mm')}: collector.casing.edge_height_mm: out of range; got -1.0; "
            "allowed: 0 to 500 mm"
        ),
        (
            f"it.toml:{line_of(text, 'flow_kg_s_m2')}: fluid.flow_kg_s_m2: out of range; got nan; "
            "allowed: 0.0005 to 0.5 kg/s m2"
        ),
        f"it.toml:{line_of(text, 'mean_C')}: operation.mean_C.1: out of range; got 300.0; {allowed_mean}",
        f"it.toml:{line_of(text, 'mean_C')}: operation.mean_C.2: wrong type; got False (true or false); {allowed_mean}",
        (
            f"it.toml:{line_of(text, 'sky')}: models.sky: unknown name; got 'bruntt'; allowed: 'berdahl-martin', "
            "'martin-berdahl', 'brunt', 'swinbank', 'measured', 'ambient'; did you mean 'brunt'?"
        ),
    ]


def test_order_is_that_of_the_file_and_not_of_the_schema(told):
    table = '[models]\nwind = "mcadams"\nsky = "brunt"\n'
    text = altered((table, ""), ("tilt_deg = 35.0", "tilt_deg = -1.0"))
    text = text.replace("[place]", '[models]\nwind = "mcadam"\n\n[place]')
    first, second = told(text)
    assert first.startswith(f"it.toml:{line_of(text, 'wind')}: models.wind: unknown name; got 'mcadam'; ")
    assert second == (
        f"it.toml:{line_of(text, 'tilt_deg')}: mounting.tilt_deg: out of range; got -1.0; allowed: 0 to 90 deg"
    )


def test_faults_across_tables_that_only_a_whole_table_shows(told):
    text = altered(
        ("emittance = 0.07\n", ""),
        ("reflectance = 0.09", "reflectance = 0.2"),
        ("mass_fraction = 0.0", "mass_fraction = 0.1"),
        ("inlet_C = 45.0", ""),
    )
    assert [message.partition(": ")[2].partition(";")[0] for message in told(text)] == [
        "collector.cover.1.transmittance: no plane slab has this pair of normal transmittance and reflectance",
        "collector.absorber.emittance: required key missing beside its companions",
        "fluid.mass_fraction: mass fraction does not fit the fluid",
        "operation.inlet_C: nothing given",
    ]


def test_an_empty_file_lacks_every_table(told):
    assert told("\n") == [
        "it.toml: title: required key missing; allowed: text",
        *[
            f"it.toml: {table}: required key missing"
            for table in ("place", "mounting", "collector", "fluid", "operation")
        ],
    ]


def test_inline_table_is_found_by_its_own_line(told):
    table = "[operation]\ninlet_C = 45.0\n"
    text = altered((table, ""), ("[place]", "operation = { inlet_C = 999.0 }\n\n[place]"))
    assert told(text) == [
        f"it.toml:{line_of(text, 'operation')}: operation.inlet_C: out of range; got 999.0; allowed: -50 to 200 C"
    ]


def test_dotted_key_is_found_by_its_own_line(told):
    text = altered(('[models]\nwind = "mcadams"\nsky = "brunt"\n', ""), ("[place]", 'models.wind = "gale"\n\n[place]'))
    (message,) = told(text)
    assert message.startswith(f"it.toml:{line_of(text, 'models.wind')}: models.wind: unknown name; got 'gale'; ")


# --- --set


@pytest.mark.parametrize(
    ("option", "read", "value"),
    [
        ("fluid.flow_kg_s_m2=0.03", lambda s: s.fluid.flow_kg_s_m2, 0.03),
        ("fluid.flow_kg_s_m2 = 0.03", lambda s: s.fluid.flow_kg_s_m2, 0.03),
        ("collector.modules=7", lambda s: s.collector.modules, 7),
        ("models.wind=jayamaha", lambda s: s.models.wind, "jayamaha"),
        ('models.wind="jayamaha"', lambda s: s.models.wind, "jayamaha"),
        ("models.sky_pressure_term=true", lambda s: s.models.sky_pressure_term, True),
        ("title=Two words = three", lambda s: s.title, "Two words = three"),
        ("place.albedo=file", lambda s: s.place.albedo, "file"),
        ("place.altitude_m=850", lambda s: s.place.altitude_m, 850.0),
        ("collector.cover.1.gap_mm=31", lambda s: [cover.gap_mm for cover in s.collector.cover], [22.0, 31.0]),
        ("collector.cover=[]", lambda s: s.collector.cover, []),
        ("operation.mean_C=[30, 55.5]", lambda s: (s.operation.inlet_C, s.operation.mean_C), (None, [30.0, 55.5])),
        ("operation.mean_C=30", lambda s: (s.operation.inlet_C, s.operation.mean_C), (None, [30.0])),
    ],
)
def test_override(accepted, option, read, value):
    before, after = read(accepted(SOUND)), read(accepted(SOUND, option))
    assert after == value != before
    assert type(after) is type(value)


def test_overrides_apply_in_turn(accepted):
    found = accepted(SOUND, "fluid.name=propylene glycol", "fluid.mass_fraction=0.4", "fluid.mass_fraction=0.35")
    assert (found.fluid.name, found.fluid.mass_fraction) == ("propylene glycol", 0.35)


def test_override_of_one_entry_of_a_list(accepted):
    text = altered(("inlet_C = 45.0", "mean_C = [30.0, 50.0]"))
    assert accepted(text, "operation.mean_C.1=65").operation.mean_C == [30.0, 65.0]


def test_override_opens_a_table_that_the_file_lacks(accepted):
    text = altered(('[models]\nwind = "mcadams"\nsky = "brunt"\n', ""))
    assert accepted(text, "models.sky=swinbank").models == ModelsTable(sky="swinbank")


@pytest.mark.parametrize(
    ("options", "read", "value"),
    [
        (["operation.mean_C=50"], lambda s: s.operation.inlet_C, 45.0),
        (["collector.absorber.coating=copper oxide"], lambda s: s.collector.absorber.absorptance, 0.93),
        (["collector.absorber.conductivity_W_mK=200"], lambda s: s.collector.absorber.metal, "copper"),
        (["collector.casing.back_conductivity_W_mK=0.05"], lambda s: s.collector.casing.back_insulation, "mineral wool"),
        (["collector.casing.edge_insulation=plywood"], lambda s: s.collector.casing.edge_conductivity_W_mK, 0.045),
        (["collector.cover.1.glass=acrylic 3 mm"], lambda s: s.collector.cover[1].transmittance, 0.88),
        (
            ["collector.cover.0.transmittance=0.9", "collector.cover.0.reflectance=0.08", "collector.cover.0.emittance=0.88"],
            lambda s: s.collector.cover[0].glass,
            "low-iron 4 mm",
        ),
    ],
)  # fmt: skip
def test_override_drops_the_rival(accepted, options, read, value):
    assert read(accepted(SOUND)) == value
    assert read(accepted(SOUND, *options)) is None


def test_override_of_a_named_glass_keeps_the_name(accepted):
    cover = accepted(SOUND, "collector.cover.0.emittance=0.8").collector.cover[0]
    assert (cover.glass, cover.emittance) == ("low-iron 4 mm", 0.8)


def test_a_later_override_drops_an_earlier_rival(accepted):
    mounting = accepted(SOUND, "mounting.wind_factor=0.5", "mounting.wind_height_m=4").mounting
    assert (mounting.wind_factor, mounting.wind_height_m) == (None, 4.0)


@pytest.mark.parametrize("option", ["fluid.flow_kg_s_m2", "", "=0.03", "  =0.03"])
def test_not_an_override(told, option):
    assert told(SOUND, option) == [f"--set: not an override; got {option!r}; allowed: key.path=value"]


@pytest.mark.parametrize(
    "option",
    [
        "collector.cover.2.gap_mm=20",  # there are two
        "collector.cover.gap_mm=20",
        "collector.cover.first=20",
        "collector.cover.2=20",
        "collector.cover.\u00b2=20",
        f"collector.cover.{'1' * 30}=2",
        "title.x=3",
        "fluid.name.x=3",
        "fluid.name.x.y=3",
    ],
)
def test_no_such_place(told, option):
    assert told(SOUND, option) == [
        (
            f"--set: no such place in the scenario file; got {option!r}; "
            "a list's entry goes by its number, from 0, and must exist: collector.cover.0.gap_mm=20"
        )
    ]


@pytest.mark.parametrize(
    ("option", "message"),
    [
        ("fluid.flow_kg_s_m2=slow", "wrong type; got 'slow' (text); allowed: 0.0005 to 0.5 kg/s m2"),
        ("fluid.flow_kg_s_m2=", "wrong type; got '' (text); allowed: 0.0005 to 0.5 kg/s m2"),
        ("fluid.flow_kg_s_m2=0.7", "out of range; got 0.7; allowed: 0.0005 to 0.5 kg/s m2"),
        ("collector.modules=1.5", "wrong type; got 1.5; allowed: 1 to 100000"),
        ("collector.cover.1.gap_mm=201", "out of range; got 201; allowed: 1 to 200 mm"),
        ("place.weather=2006", "wrong type; got 2006; allowed: text"),
        ("fluid.nam=water", "unknown key; did you mean name?"),
        ("modles.wind=mitchell", "unknown key; did you mean models?"),
        (
            "operation.inlet_C=-3",
            "the fluid is frozen; got -3 C; allowed: at least 0.0 C, where water begins to freeze",
        ),
        (
            "collector.absorber.tube_inner_mm=12.5",
            "tube without a wall; got 12.5 mm; allowed: below tube_outer_mm, 12 mm",
        ),
        (
            "collector.absorber.metal=tin",
            f"not in the catalogue; got 'tin'; allowed: {', '.join(map(repr, shelf('metals')))}",
        ),
    ],
)
def test_wrong_override(told, option, message):
    key = option.partition("=")[0]
    named = "modles" if key.startswith("modles") else key
    assert told(SOUND, option) == [f"--set: {named}: {message}"]


@pytest.mark.parametrize(
    ("option", "message"),
    [
        ("operation.mean_C=[30, 300]", "operation.mean_C.1: out of range; got 300; "),
        ('operation.mean_C=[30, "warm"]', "operation.mean_C.1: wrong type; got 'warm' (text); "),
        ('place={weather="miami", albedo=0.2, altitude_m=9999}', "place.altitude_m: out of range; got 9999; "),
    ],
)
def test_wrong_inside_an_override(told, option, message):
    (said,) = told(SOUND, option)
    assert said.startswith(f"--set: {message}")


def test_entry_of_a_list_that_the_file_lacks(told):
    assert told(SOUND, "operation.mean_C.0=30") == [
        (
            "--set: operation.mean_C.0: wrong type; got {'0': 30} (a table); "
            "allowed: a number or a list of numbers, each -50 to 200 C"
        )
    ]


def test_faults_of_file_and_override_together(told):
    text = altered(("tilt_deg = 35.0", "tilt_deg = 95.0"))
    assert sorted(told(text, "fluid.flow_kg_s_m2=0.7")) == [
        "--set: fluid.flow_kg_s_m2: out of range; got 0.7; allowed: 0.0005 to 0.5 kg/s m2",
        f"it.toml:{line_of(text, 'tilt_deg')}: mounting.tilt_deg: out of range; got 95.0; allowed: 0 to 90 deg",
    ]


def test_override_mends_a_fault_of_the_file(accepted):
    assert accepted(altered(("tilt_deg = 35.0", "tilt_deg = 95.0")), "mounting.tilt_deg=30").mounting.tilt_deg == 30.0


def test_override_of_a_broken_file_does_not_help(told):
    text = altered(("tilt_deg = 35.0", "tilt_deg = 35,0"))
    (message,) = told(text, "mounting.tilt_deg=35")
    assert message.startswith(f"it.toml:{line_of(text, 'tilt_deg')}: not valid TOML: ")


# --- what is shipped, and the schema that editors get


@pytest.mark.parametrize("path", [STARTER, *SCENARIOS], ids=lambda path: path.name)
def test_shipped_scenarios_are_sound(path):
    assert read_scenario(path).title


def test_there_are_scenarios_to_read():
    assert {path.name for path in SCENARIOS} >= {"hut.toml", "laundry.toml", "pool.toml"}


def test_the_text_that_faults_are_put_into_is_sound(accepted):
    assert accepted(SOUND).title == "Bench for messages"


def test_values_at_their_bounds_are_accepted(accepted):
    found = accepted(altered(("tilt_deg = 35.0", "tilt_deg = 90"), ("inlet_C = 45.0", "inlet_C = 0")))
    assert (found.mounting.tilt_deg, found.operation.inlet_C) == (90.0, 0.0)


def test_a_glycol_mixture_may_be_colder_than_ice(accepted, told):
    glycol = (('name = "water"', 'name = "propylene glycol"'), ("mass_fraction = 0.0", "mass_fraction = 0.4"))
    assert accepted(altered(*glycol, ("inlet_C = 45.0", "inlet_C = -15.0"))).operation.inlet_C == -15.0
    freezing = freezing_point("propylene glycol", mass_fraction=0.4) - 273.15
    warmer = math.ceil(10.0 * freezing) / 10.0  # what is told as allowed must be allowed
    assert accepted(altered(*glycol, ("inlet_C = 45.0", f"inlet_C = {warmer}"))).operation.inlet_C == warmer
    (message,) = told(altered(*glycol, ("inlet_C = 45.0", "inlet_C = -40.0")))
    assert message.endswith(
        f": operation.inlet_C: the fluid is frozen; got -40 C; allowed: at least {warmer:.1f} C, "
        "where propylene glycol begins to freeze"
    )


def _properties():
    schema = Scenario.model_json_schema()
    for table, content in {"Scenario": schema, **schema["$defs"]}.items():
        for key, entry in content["properties"].items():
            yield f"{table}.{key}", entry


def _kinds(entry):
    inside = [kind for way in entry.get("anyOf", []) for kind in _kinds(way)]
    return {*inside, *_kinds(entry["items"])} if "items" in entry else {entry.get("type"), *inside}


NUMERIC = {name: entry for name, entry in _properties() if {"number", "integer"} & set(_kinds(entry))}


def test_every_key_with_a_number_is_looked_at():
    # 5 of the place, 5 of the mounting, 4 of the collector, 7 of a cover, 8 of the absorber, 5 of the casing,
    # 2 of the fluid, 2 of the operation, counted in the class bodies; there may come more
    assert len(NUMERIC) >= 38


@pytest.mark.parametrize("name", NUMERIC)
def test_schema_describes_a_number(name):
    assert NUMERIC[name]["description"]
    assert isinstance(NUMERIC[name]["unit"], str)


@pytest.mark.parametrize("name", [name for name in NUMERIC if name.endswith(("_mm", "_m", "_m2", "_deg", "_C", "_h"))])
def test_unit_in_the_schema_is_the_one_in_the_name(name):
    wanted = {"flow_kg_s_m2": "kg/s m2", "extinction_per_m": "1/m", "a6_s_m": "s/m"}
    key = name.partition(".")[2]
    assert NUMERIC[name]["unit"] == wanted.get(key, key.rpartition("_")[2])


def test_names_of_the_models_table_are_the_choices():
    literals = {
        key: set(get_args(field.annotation))
        for key, field in ModelsTable.model_fields.items()
        if get_args(field.annotation)
    }
    assert literals == {step: set(names) for step, names in CHOICES.items()}
    assert all(source for names in CHOICES.values() for source in names.values())


def test_names_of_the_fluid_table_are_the_fluids():
    assert set(get_args(FluidTable.model_fields["name"].annotation)) == set(FLUIDS)


def test_rivals_are_keys_of_the_schema():
    keys = {name.partition(".")[2] for name, _ in _properties()}
    assert {key for sets in RIVALS.values() for rivals in sets for key in rivals} <= keys


@pytest.mark.parametrize("kind", SHELVES)
def test_every_material_tells_its_source(kind):
    assert shelf(kind)
    assert all(values["source"] for values in shelf(kind).values())
