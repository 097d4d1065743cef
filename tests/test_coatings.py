"""Coatings against each other: what `coatings` tells, and how far its intervals and its exchange rate are to be believed."""

from __future__ import annotations

import csv
import json
import re
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from click.testing import CliRunner

from collector.build.candidates import Candidate, read_candidate, read_candidates
from collector.build.reading import read_scenario
from collector.cli import main
from collector.show.coating_plots import draw_plane, draw_ranking
from collector.show.coating_tables import COATING_COLUMNS, coatings_text
from collector.study.account import runs_of
from collector.study.asked import Asked, changes_of
from collector.study.coatings import compared, study_coatings
from collector.study.response import Plane, fit_response
from collector.study.year import open_scenario_weather
from weather.errors import InputError

ROOT = Path(__file__).parents[1]
LAUNDRY, HUT, POOL = (ROOT / "scenarios" / f"{name}.toml" for name in ("laundry", "hut", "pool"))
SELECTIVE, STACK = (str(ROOT / "scenarios" / "coatings" / name) for name in ("selective.csv", "cermet-stack.toml"))
FIVE = ["0.95/0.05", SELECTIVE, STACK, "black chrome on nickel", "selective paint"]
EVERYTHING = Asked(price=0.08, aged=(-0.02, 0.03), test_temperature=250.0, activation=90.0)


def run(*arguments: object):
    found = CliRunner().invoke(main, [str(argument) for argument in arguments], prog_name="noonplate")
    if found.exception is not None and not isinstance(found.exception, SystemExit):
        raise found.exception
    return found


def refused(*arguments: object) -> list[str]:
    found = run("coatings", *arguments)
    assert (found.exit_code, found.stdout) == (2, "")
    return [line.removeprefix("noonplate: ") for line in found.stderr.splitlines()]


def pair(absorptance: float, emittance: float, name: str = "one") -> Candidate:
    return Candidate(name=name, basis="", absorptance=absorptance, emittance=emittance, radiating=None, notices=())


@pytest.fixture(scope="module")
def greensboro():
    return open_scenario_weather(read_scenario(LAUNDRY), base=LAUNDRY.parent)


@pytest.fixture(scope="module")
def steady(greensboro):
    """A comparison of the laundry's collector without heat held, which is quicker."""
    scenario = read_scenario(LAUNDRY)
    table = scenario.collector.model_copy(update={"capacity_kJ_m2K": None})

    def comparing(*candidates: Candidate, operation=None, **asked):
        changed = scenario.model_copy(update={"collector": table, "operation": operation or scenario.operation})
        return compared(changed, candidates, weather=greensboro, asked=Asked(**asked))

    return comparing


@pytest.fixture(scope="module")
def five(greensboro):
    return compared(read_scenario(LAUNDRY), read_candidates(FIVE), weather=greensboro, asked=EVERYTHING)


# --- what a coating may be


def test_candidates():
    chrome, given, spectrum, stack = read_candidates(["black chrome on nickel", " 0.9 / .125", SELECTIVE, STACK])
    assert (chrome.absorptance, chrome.emittance, chrome.radiating) == (0.95, 0.1, None)
    assert (given.name, given.absorptance, given.emittance) == ("0.9 / .125", 0.9, 0.125)
    assert spectrum.absorptance == pytest.approx(0.95, abs=0.001)
    assert (spectrum.emittance, stack.emittance) == pytest.approx((0.05, 0.052), abs=0.001)
    assert "near-normal emittance" in spectrum.basis
    assert "hemispherical emittance of the stack" in stack.basis
    corrected = read_candidates([SELECTIVE, STACK], metal=True)
    assert corrected[0].emittance > spectrum.emittance
    assert corrected[1].emittance == stack.emittance


def test_a_spectrum_in_several_files(tmp_path):
    rows = Path(SELECTIVE).read_text(encoding="utf-8").splitlines()
    for name, part in (("a.csv", rows[2:82]), ("b.csv", rows[80:])):
        (tmp_path / name).write_text("\n".join([*rows[:2], *part]) + "\n")
    joined = read_candidate(f"{tmp_path / 'a.csv'},{tmp_path / 'b.csv'}")
    assert joined.absorptance == pytest.approx(read_candidate(SELECTIVE).absorptance, abs=1e-6)


NEITHER = (
    "--coating: neither a coating of the catalogue, nor a pair, nor a file; got {}; allowed: a name of "
    "`noonplate catalogue coatings`, a pair such as 0.95/0.05, a CSV spectrum, a stack in TOML"
)
CANDIDATE_FAULTS = {
    "soot": [NEITHER.format("'soot'")],
    "cermet": [NEITHER.format("'cermet'") + "; did you mean 'vacuum-deposited cermet'?"],
    "copper oxid": [NEITHER.format("'copper oxid'") + "; did you mean 'copper oxide'?"],
    "0.95/5": ["--coating: emittance out of range; got 0.95/5; allowed: 0.01 to 1"],
    "1.5/0.001": [
        "--coating: absorptance out of range; got 1.5/0.001; allowed: 0.05 to 1",
        "--coating: emittance out of range; got 1.5/0.001; allowed: 0.01 to 1",
    ],
    "none.csv": ["none.csv: spectrum cannot be read: No such file or directory; check the path"],
    "none.toml": ["none.toml: stack file cannot be read: No such file or directory; check the path"],
}


@pytest.mark.parametrize("given", CANDIDATE_FAULTS)
def test_a_candidate_refused(given):
    with pytest.raises(InputError) as caught:
        read_candidate(given)
    assert [str(problem) for problem in caught.value.problems] == CANDIDATE_FAULTS[given]


ASKED_FAULTS = {
    "limit": ({"limit": 900.0}, ["--limit: out of range; got 900; allowed: -50 to 500 C"]),
    "draws": ({"draws": 499}, ["--draws: out of range; got 499; allowed: 500 to 100000"]),
    "no number": ({"sigma_eps": float("nan")}, ["--sigma-eps: out of range; got nan; allowed: 0 to 0.2"]),
    "price": ({"price": -1.0}, ["--price: out of range; got -1; allowed: 0 to 1000 money per kWh"]),
    "two": (
        {"life": 0.0, "discount": 1.0},
        [
            "--life: out of range; got 0; allowed: 1 to 60 years",
            "--discount: out of range; got 1; allowed: 0 to 0.3 a year",
        ],
    ),
    "ageing": ({"aged": (2.0, 0.0)}, ["--aged: out of range; got 2,0; allowed: each -0.9 to 0.9"]),
    "activation alone": (
        {"activation": 90.0},
        ["--activation: needs --test-temperature beside it; give both or neither"],
    ),
    "test alone": (
        {"test_temperature": 250.0},
        ["--test-temperature: needs --activation beside it; give both or neither"],
    ),
}


@pytest.mark.parametrize("name", ASKED_FAULTS)
def test_what_is_asked_refused(name):
    given, messages = ASKED_FAULTS[name]
    with pytest.raises(InputError) as caught:
        Asked(**given)
    assert [str(problem) for problem in caught.value.problems] == messages


def test_changes_by_age():
    assert changes_of(None) is None
    assert changes_of("-0.02, 0.03") == (-0.02, 0.03)
    for given in ("0.02", "a,b", "1,2,3"):
        with pytest.raises(InputError, match="--aged: not two numbers; got "):
            changes_of(given)


def test_comparisons_refused(tmp_path):
    assert refused(LAUNDRY, "--coating", "0.95/0.05") == [
        "--coating: nothing to compare with; got 1 coating; allowed: two or more; give --coating again"
    ]
    two = ("--coating", "0.95/0.05", "--coating", "0.9/0.05")
    assert refused(HUT, *two) == [
        "operation.mean_C: coatings are compared at one; got 3 temperatures; choose one: --set operation.mean_C=35"
    ]
    assert refused(LAUNDRY, *two, "--aged", "0.2,0") == [
        "--aged: out of range once aged; got 0.95/0.05 at 1.150/0.050; allowed: absorptance 0.05 to 1, emittance 0.003 to 1"
    ]
    assert refused(LAUNDRY, "--coating", "soot", "--coating", "0.95/5")[-1] == "2 faults"
    text = re.sub(r"\[\[collector.cover.*?(?=\[fluid\])", "", LAUNDRY.read_text(encoding="utf-8"), flags=re.DOTALL)
    report = "[collector.tested]\neta0 = 0.8\na1_W_m2K = 3.5\narea_m2 = 2.2\nb0 = 0.1\n\n[fluid]"
    path = tmp_path / "tested.toml"
    path.write_text(re.sub(r"capacity_kJ_m2K.*\n", "", text).replace("[fluid]", report), encoding="utf-8")
    assert refused(path, *two) == [
        "collector.tested: a collector known by its test report has no coating to change; describe it by its build"
    ]


# --- the comparison


def test_each_year_is_the_years_own(five):
    """A coating's heat, stagnation and emittance are those that `year` tells of it."""
    for row, option in zip(
        five.account["coatings"],
        (
            None,
            "reflectance_csv=coatings/selective.csv",
            "stack=coatings/cermet-stack.toml",
            "coating=black chrome on nickel",
        ),
        strict=False,
    ):
        overrides = [f"collector.absorber.{option}"] if option else []
        (own,) = runs_of(read_scenario(LAUNDRY, overrides=overrides), base=LAUNDRY.parent)
        for key in ("useful_kWh_m2", "stagnation_plate_C"):
            assert row[key] == pytest.approx(own.account[key], abs=1e-6)
        for key in ("absorptance", "emittance", "emittance_at_C"):
            assert row[key] == pytest.approx(own.account["coating"][key], abs=1e-9)
        assert row["hours_above"] == np.count_nonzero(own.still.t_plate > 150.0 + 273.15)


def test_the_response_is_close_and_its_error_told(five, greensboro):
    """Intervals rest on a polynomial; a draw far out, solved as a year of its own, has the heat that the polynomial gives."""
    account = five.account
    assert account["response"]["error_kWh_m2"] < 0.05
    absorptance, emittance, heat = five.plane
    for a, e in ((5, 5), (35, 3), (20, 33)):
        there = [pair(float(absorptance[a]), float(emittance[e])), pair(0.95, 0.05)]
        solved = compared(read_scenario(LAUNDRY), there, weather=greensboro, asked=Asked())
        assert heat[e, a] == pytest.approx(solved.account["coatings"][0]["useful_kWh_m2"], abs=0.1)


def test_the_same_coating_twice(steady):
    found = steady(pair(0.95, 0.05), pair(0.95, 0.05)).account["coatings"][1]
    assert found["difference_kWh_m2"] == 0.0
    low, high = found["interval_kWh_m2"]
    assert low == pytest.approx(-high, rel=0.1)
    assert found["order_probability"] == 0.5
    assert not found["told_apart"]


def test_intervals_follow_from_the_slopes(steady):
    """Nearly linear: the width is 1.96 times the root of the sum of the squares, of both coatings."""
    sigma_a, sigma_e = 0.004, 0.015
    found = steady(pair(0.95, 0.1), pair(0.93, 0.1), sigma_alpha=sigma_a, sigma_eps=sigma_e, draws=20_000).account
    (a_up, base, e_up) = (
        steady(pair(a, e), pair(0.9, 0.1)).account["coatings"][0]["useful_kWh_m2"]
        for a, e in ((0.951, 0.1), (0.95, 0.1), (0.95, 0.101))
    )
    by_a, by_e = (a_up - base) / 0.001, (e_up - base) / 0.001
    half = 1.96 * np.sqrt(2.0 * ((by_a * sigma_a) ** 2 + (by_e * sigma_e) ** 2))
    low, high = found["coatings"][1]["interval_kWh_m2"]
    assert 0.5 * (high - low) == pytest.approx(half, rel=0.03)
    assert found["coatings"][0]["exchange"] == pytest.approx(-by_e / by_a, rel=0.01)


def test_without_uncertainty_every_order_is_real(steady):
    found = steady(pair(0.95, 0.05), pair(0.9501, 0.05), sigma_alpha=0.0, sigma_eps=0.0).account["coatings"][1]
    assert found["interval_kWh_m2"] == pytest.approx([found["difference_kWh_m2"]] * 2, abs=1e-9)
    assert (found["order_probability"], found["told_apart"]) == (1.0, True)


def test_equal_coatings_are_not_told_apart_whatever_the_draws(steady):
    told = [steady(pair(0.94, 0.1), pair(0.94, 0.1), seed=seed, draws=500).account["coatings"][1] for seed in range(60)]
    assert sum(row["told_apart"] for row in told) <= 0.05 * 60


def test_samples_of_one_coating_are_told_apart_as_seldom_as_95_percent_says(steady):
    """Two samples of one coating, each measured with the stated uncertainty: a 95 % interval misses 0 once in twenty.

    Of 60 pairs 3 are to be expected; 7 or fewer in 99 of 100 such tests (binomial), 8 would mean intervals too narrow.
    """
    apart = 0
    for seed in range(60):
        noise = np.random.default_rng(1000 + seed).standard_normal((2, 2)) * (0.005, 0.01)
        samples = [pair(0.94 + float(a), 0.1 + float(e)) for a, e in noise]
        apart += steady(*samples, seed=seed).account["coatings"][1]["told_apart"]
    assert apart <= 7


def test_a_large_difference_is_told_apart(steady):
    found = steady(pair(0.95, 0.05), pair(0.95, 0.9)).account["coatings"][1]
    assert found["told_apart"]
    assert found["order_probability"] == 1.0


# Roberts 2013, Solar Energy 98, 503: one point of emittance is worth so many points of absorptance (a flat plate, by its
# working temperature). Another collector, another place: within a factor of two.
@pytest.mark.parametrize(("mean_C", "published"), [(40.0, 0.3), (80.0, 0.6)])
def test_exchange_rate_is_in_the_published_range(steady, mean_C, published):
    operation = read_scenario(LAUNDRY, overrides=[f"operation.mean_C={mean_C}"]).operation
    found = steady(pair(0.95, 0.05), pair(0.93, 0.05), operation=operation).account
    assert 0.5 * published < found["coatings"][0]["exchange"] < 2.0 * published


def test_ranges_are_held_at_what_is_possible(steady):
    found = steady(pair(1.0, 0.01), pair(0.99, 0.01), sigma_alpha=0.01).account
    assert found["response"]["draws_clipped"] > 500
    said = (
        f"{found['response']['draws_clipped']} of 8000 drawn absorptances and emittances held at the ends of the ranges"
    )
    assert any(words.startswith(said) for words in found["notices"])
    for row in found["coatings"]:
        assert all(np.isfinite(row["useful_interval_kWh_m2"]))


def test_nothing_running_is_no_nan(steady):
    operation = read_scenario(LAUNDRY, overrides=["operation.mean_C=200"]).operation
    found = steady(pair(0.5, 0.9), pair(0.4, 0.9), operation=operation, price=0.1, aged=(-0.1, 0.0))
    text = json.dumps(found.account, allow_nan=False)
    assert "no hour runs; its emittance is the one at 100 C" in text
    assert found.account["coatings"][0]["exchange"] is None
    assert "In this collector and place" not in coatings_text(found.account)
    draw_plane(found.account, plane=found.plane)
    draw_ranking(found.account)


# --- worth and ageing


def test_worth():
    asked = Asked(price=0.1, life=20.0, discount=0.03)
    by_hand = sum(1.03**-year for year in range(1, 21))
    assert asked.annuity == pytest.approx(by_hand)
    assert Asked(discount=0.0, life=17.0).annuity == 17.0


def test_worth_of_a_difference(five):
    for row in five.account["coatings"]:
        worth = 0.08 * five.account["asked"]["annuity"]
        assert row["worth_per_m2"] == pytest.approx(row["difference_kWh_m2"] * worth)
        assert row["worth_interval_per_m2"] == pytest.approx([worth * value for value in row["interval_kWh_m2"]])


@pytest.mark.parametrize(("aged", "weight", "criterion"), [((-0.02, 0.03), 0.5, 0.035), ((-0.04, 0.1), 0.25, 0.065)])
def test_performance_criterion(aged, weight, criterion):
    """ISO 22975-3: PC = -change of absorptance + weight x change of emittance, at most 0.05."""
    assert Asked(aged=aged, weight=weight).criterion == pytest.approx(criterion)


def test_ageing(five, greensboro):
    assert five.account["asked"]["criterion_passed"] is True
    for row in five.account["coatings"]:
        assert row["aged"]["useful_kWh_m2"] < row["useful_kWh_m2"]
    first = five.account["coatings"][0]["aged"]
    other = compared(read_scenario(LAUNDRY), [pair(0.93, 0.08), pair(0.9, 0.1)], weather=greensboro, asked=Asked())
    assert first["useful_kWh_m2"] == pytest.approx(other.account["coatings"][0]["useful_kWh_m2"], abs=1e-6)


def test_hours_by_temperature_add_up(five):
    for row in five.account["coatings"]:
        bins = row["temperatures"]
        assert sum(each["running_h"] + each["standing_h"] for each in bins) == pytest.approx(8760.0)
        assert sum(each["never_run_h"] for each in bins) == pytest.approx(8760.0)
        assert bins[-1]["to_C"] - 20.0 <= row["stagnation_plate_C"] <= bins[-1]["to_C"]
        assert row["equivalent"]["never_run_h"] > row["equivalent"]["operated_h"] > 0.0


# --- what is printed and written


def test_text(five):
    text = coatings_text(five.account)
    assert text.isascii()
    assert max(map(len, text.splitlines())) <= 80
    flat = re.sub(r"\s+", " ", text)
    for said in (
        "2000 draws with standard uncertainties of 0.005 in absorptance and 0.01 in emittance",
        "performance criterion 0.035 with a weight of 0.5 on emittance, passes",
        "Hours at 250 C that age as much as a year",
        "20 years, discounted at 3 % a year: 14.88 times",
        "With the pump stopped the plate reaches 215 C",
        "largest error found",
    ):
        assert said in flat
    assert text == coatings_text(json.loads(json.dumps(five.account)))


def test_audit(five):
    assert five.sound
    assert five.account["residual_max_W_m2"] < 1e-6


def test_files(tmp_path):
    arguments = [POOL, "--coating", "0.94/0.92", "--coating", "copper oxide"]
    found = run("coatings", *arguments, "--out", tmp_path, "--json")
    names = ["summary.json", "coatings.csv", "coatings-by-heat.png", "heat-over-coatings.png"]
    assert found.stderr == f"written to {tmp_path}: {', '.join(names)}\n"
    assert {path.name for path in tmp_path.iterdir()} == set(names)
    assert json.loads((tmp_path / names[0]).read_text(encoding="utf-8")) == json.loads(found.stdout)
    with (tmp_path / names[1]).open(encoding="utf-8", newline="") as file:
        rows = list(csv.reader(file))
    assert rows[0] == list(COATING_COLUMNS)
    assert [len(row) for row in rows] == [len(COATING_COLUMNS)] * 3
    for name in names[2:]:
        assert (tmp_path / name).read_bytes().startswith(b"\x89PNG")


def test_the_seed_fixes_the_result(steady):
    two = [pair(0.95, 0.05), pair(0.94, 0.04)]
    first, again, other = (steady(*two, seed=seed).account["coatings"][1]["interval_kWh_m2"] for seed in (1, 1, 2))
    assert first == again != other


@pytest.mark.parametrize("as_json", [True, False])
def test_a_comparison_that_does_not_converge(monkeypatch, as_json):
    monkeypatch.setattr("collector.balance.steady.MOST_ITERATIONS", 1)
    found = run(
        "coatings", LAUNDRY, "--coating", "0.95/0.05", "--coating", "0.94/0.05", *(["--json"] if as_json else [])
    )
    assert found.exit_code == 3
    assert found.stderr == "noonplate: hours without convergence: see the result\n"
    assert "not to be trusted" in re.sub(r"\s+", " ", found.stdout)


def test_study_opens_the_scenarios_weather():
    found = study_coatings(
        read_scenario(POOL), [pair(0.94, 0.9), pair(0.9, 0.2)], base=POOL.parent, asked=Asked(draws=500)
    )
    assert found.account["weather"]["place"] == "Miami FL"
    assert len(found.account["coatings"]) == 2


# --- the response surface itself


@pytest.mark.parametrize(("emittance", "years"), [((0.05, 0.15), 10), ((0.05, 0.95), 16)])
def test_a_quadratic_is_found_again(emittance, years):
    plane = Plane((0.9, 0.96), emittance, 0.88)

    def heat(a: float, e: float) -> float:
        factor = 1.0 / (1.0 / e + 1.0 / 0.88 - 1.0)
        return 1000.0 * a**2 - 300.0 * a * factor + 50.0 * factor**2

    found = fit_response(heat, plane=plane, known=[(0.93, 0.1, heat(0.93, 0.1))])
    assert (found.years, found.error) == (years, pytest.approx(0.0, abs=1e-9))
    assert found(np.array([0.91]), np.array([0.12])) == pytest.approx([heat(0.91, 0.12)])
    by_a, _ = found.slopes(0.93, 0.1)
    assert by_a == pytest.approx(2000.0 * 0.93 - 300.0 / (1.0 / 0.1 + 1.0 / 0.88 - 1.0), rel=1e-6)


def test_its_error_is_found():
    found = fit_response(lambda a, e: abs(a - 0.93) * 100.0 + e, plane=Plane((0.9, 0.96), (0.05, 0.1), 1.0), known=[])
    assert found.error > 0.1


def test_a_coating_with_a_curve_ages_at_every_temperature():
    stack = read_candidate(STACK)
    aged = stack.aged(d_absorptance=-0.01, d_emittance=0.02)
    t = np.array([300.0, 500.0])
    assert aged.radiating(t)[0] == pytest.approx(stack.radiating(t)[0] + 0.02)
    with pytest.raises(InputError, match="out of range once aged"):
        replace(stack).aged(d_absorptance=0.0, d_emittance=-0.05)
