"""What comes of spectra, tables of optical constants and stack files, and every word that is said about them."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
from pvlib.spectrum import get_reference_spectra
from scipy.constants import zero_Celsius

from collector.build.spectra import read_index, read_spectrum
from collector.build.stacks import read_stack
from collector.physics.layers import bruggeman_1935, hemispherical_spectrum, maxwell_garnett_1904, normal_spectrum
from collector.physics.spectrum import cut_off, emittance, solar_absorptance
from weather.errors import InputError

COATINGS = Path(__file__).parents[1] / "scenarios" / "coatings"
UM = (0.3, 0.35, 0.4, 0.45, 0.5)  # near enough to one another to leave no gap
SHARES = (0.05, 0.06, 0.07, 0.08, 0.09)


def rows(*, head: str = "wavelength (um),reflectance (fraction)", um=UM, shares=SHARES, sep: str = ",") -> str:
    return "\n".join([head, *(f"{x:.6g}{sep}{r:.6g}" for x, r in zip(um, shares, strict=True))]) + "\n"


@pytest.fixture
def read(tmp_path):
    """Spectrum of these texts, and its notices."""

    def reading(*texts: str | bytes):
        paths = []
        for name, text in zip("abc", texts, strict=False):
            paths.append(tmp_path / f"{name}.csv")
            paths[-1].write_bytes(text if isinstance(text, bytes) else text.encode())
        found = read_spectrum(paths)
        return found.spectrum, list(found.notices)

    return reading


@pytest.fixture
def told(read, tmp_path):
    """What is wrong with these texts, a string a fault; the folder is left out."""

    def telling(*texts: str | bytes) -> list[str]:
        with pytest.raises(InputError) as caught:
            read(*texts)
        return [str(problem).replace(f"{tmp_path}/", "") for problem in caught.value.problems]

    return telling


QUIET = ["a.csv: wavelength in um by its header", "a.csv: reflectance in fractions of 1 by its header"]

# --- what instruments write


LAYOUTS = {
    "commas": rows(),
    "semicolons": rows(head="wavelength (um);reflectance (fraction)", sep=";"),
    "tabs": rows(head="wavelength (um)\treflectance (fraction)", sep="\t"),
    "semicolons and decimal commas": rows(head="Wavelength [um];Reflectance [fraction]", sep=";").replace(".", ","),
    "tabs and decimal commas": rows(head="wavelength um\treflectance fraction", sep="\t").replace(".", ","),
    "quotes": '"wavelength (um)","reflectance (fraction)"\n'
    + "".join(f'"{x}","{r}"\n' for x, r in zip(UM, SHARES, strict=True)),
    "units on a line of their own": rows(head="wavelength,R\num,fraction"),
    "head in a comment": rows(head="# wavelength um,reflectance fraction"),
    "comments, empty lines, titles": "# measured\nSample 7\n\n" + rows() + "\n# end\n// so\n! it\n",
    "separator at each line's end": rows().replace("\n", ",\n"),
    "Windows line ends, byte order mark": "\ufeff" + rows().replace("\n", "\r\n"),
    "exponents": rows(um=UM).replace("0.3,", "3.0e-1,").replace("0.05", "5E-2"),
    "micro sign": rows(head="wavelength (\u00b5m),reflectance (fraction)"),
    "Greek mu": rows(head="\u03bb (\u03bcm),\u03c1 fraction"),
    "columns the other way round": "reflectance ratio,lambda_um\n"
    + "".join(f"{r},{x}\n" for x, r in zip(UM, SHARES, strict=True)),
    "other columns beside": "nr,wavelength um,absorptance,reflectance fraction\n"
    + "".join(f"{nr},{x},{1 - r},{r}\n" for nr, (x, r) in enumerate(zip(UM, SHARES, strict=True))),
}


@pytest.mark.parametrize("name", LAYOUTS)
def test_layouts_that_all_say_the_same(read, name):
    surface, notices = read(LAYOUTS[name])
    assert surface.wavelength == pytest.approx(np.array(UM) * 1e-6, rel=1e-12)
    assert surface.reflectance.tolist() == list(SHARES)
    assert notices == QUIET


def test_white_space_between_the_columns(read):
    surface, _ = read("\n".join(f"  {x}   {r}" for x, r in zip(UM, SHARES, strict=True)))
    assert surface.reflectance.tolist() == list(SHARES)


def test_latin_1_is_read_and_said(read):
    _, notices = read(rows(head="wavelength (\u00b5m),reflectance (fraction)").encode("latin-1"))
    assert notices == ["a.csv: not UTF-8, read as Latin-1", *QUIET]


# Head of the wavelength, micrometres to the file's unit, what is said
UNITS = {
    "nm": ("wavelength (nm)", 1e3, "wavelength in nm by its header"),
    "nanometres": ("Wavelength nanometres", 1e3, "wavelength in nm by its header"),
    "microns": ("microns", 1.0, "wavelength in um by its header"),
    "m": ("wavelength (m)", 1e-6, "wavelength in m by its header"),
    "metres": ("lambda metres", 1e-6, "wavelength in m by its header"),
    "no unit, large": (
        "wavelength",
        1e3,
        "no unit of wavelength in a header; taken as nm, since every value is above 100",
    ),
    "no unit, small": (
        "wavelength",
        1.0,
        "no unit of wavelength in a header; taken as um, since not every value is above 100",
    ),
}


@pytest.mark.parametrize("name", UNITS)
def test_unit_of_wavelength(read, name):
    head, factor, said = UNITS[name]
    surface, notices = read(rows(head=f"{head},reflectance (fraction)", um=[x * factor for x in UM]))
    assert surface.wavelength == pytest.approx(np.array(UM) * 1e-6, rel=1e-9)
    assert notices[0] == f"a.csv: {said}"


def test_wavenumbers_become_wavelengths(read):
    surface, notices = read(
        rows(head="wavenumber cm-1,reflectance fraction", um=[1e4 / x for x in UM[::-1]], shares=SHARES[::-1])
    )
    assert surface.wavelength == pytest.approx(np.array(UM) * 1e-6, rel=1e-5)  # six digits were written
    assert notices[0] == "a.csv: wavenumber in cm-1 by its header, turned into wavelength"
    assert surface.reflectance.tolist() == list(SHARES)
    assert notices[2:] == ["a.csv: rows not in order of rising wavelength, sorted"]


PERCENTS = {
    "%": ("R (%)", 100.0, "reflectance in % by its header"),
    "percent": ("reflectance percent", 100.0, "reflectance in % by its header"),
    "fraction": ("reflectance fraction", 1.0, "reflectance in fractions of 1 by its header"),
    "no unit, large": ("R", 100.0, "no unit of reflectance in a header; taken as %, since values reach 9"),
    "no unit, small": (
        "R",
        1.0,
        "no unit of reflectance in a header; taken as fractions of 1, since values reach 0.09",
    ),
    "no unit, just above 1": (
        "R",
        11.2,
        "no unit of reflectance in a header; taken as fractions of 1, since values reach 1.008",
    ),
}


@pytest.mark.parametrize("name", PERCENTS)
def test_unit_of_reflectance(read, name):
    head, factor, said = PERCENTS[name]
    surface, notices = read(rows(head=f"wavelength (um),{head}", shares=[r * factor for r in SHARES]))
    divisor = 100.0 if factor == 100.0 else 1.0
    assert surface.reflectance == pytest.approx(np.minimum(np.array(SHARES) * factor / divisor, 1.0), rel=1e-9)
    assert notices[1] == f"a.csv: {said}"


def test_percent_that_looks_like_fractions(read):
    surface, notices = read(rows(head="wavelength (um),reflectance (%)"))
    assert surface.reflectance == pytest.approx(np.array(SHARES) / 100.0)
    assert notices[1] == (
        "a.csv: reflectance in % by its header, though no value is above 0.09: check that they are not fractions"
    )


# --- what is put right, and said


def test_unsorted_rows(read):
    surface, notices = read(rows(um=UM[::-1], shares=SHARES[::-1]))
    assert surface.reflectance.tolist() == list(SHARES)
    assert notices == [*QUIET, "a.csv: rows not in order of rising wavelength, sorted"]


def test_a_wavelength_twice_is_averaged(read):
    surface, notices = read(rows(um=(*UM, 0.4), shares=(*SHARES, 0.09)))
    assert surface.reflectance.tolist() == pytest.approx([0.05, 0.06, 0.08, 0.08, 0.09])
    assert notices[2:] == [
        "a.csv: rows not in order of rising wavelength, sorted",
        "a.csv: 1 wavelengths stand more than once, averaged",
    ]


def test_a_wavelength_twice_with_unlike_readings(read):
    surface, notices = read(rows(um=(*UM[:3], 0.4, *UM[3:]), shares=(*SHARES[:3], 0.13, *SHARES[3:])))
    assert surface.reflectance[2] == pytest.approx(0.1)
    assert notices[2:] == [
        "a.csv: 1 wavelengths stand more than once, averaged",
        "a.csv: readings of one wavelength differ by 0.06 in reflectance, at 0.4 um",
    ]


def test_noise_beyond_the_bounds_is_clipped(read):
    surface, notices = read(rows(shares=(-0.02, 0.5, 1.008, 1.0, 0.0)))
    assert surface.reflectance.tolist() == [0.0, 0.5, 1.0, 1.0, 0.0]
    assert notices[2:] == [
        "a.csv: reflectance slightly outside 0 to 1 set to the bound: 2 points, furthest -0.02 at 0.3 um"
    ]


def test_gaps(read):
    """A step of more than 0.2 in the logarithm: 1 to 1.22 um is none, 1.22 to 1.5 um is one."""
    _, notices = read(rows(um=(0.9, 1.0, 1.22, 1.5, 1.6)))
    assert notices[2:] == [
        "no point between 1.22 and 1.5 um: bridged by a straight line".replace("1.22 and", "1.22 um and")
    ]


def test_columns_that_could_each_be_it(read):
    text = "nm,total reflectance %,diffuse reflectance %\n" + "".join(f"{x * 1e3},{9},{5}\n" for x in UM)
    surface, notices = read(text)
    assert surface.reflectance.tolist() == [0.09] * 5
    assert notices[0] == (
        "a.csv: columns 'total reflectance %' and 'diffuse reflectance %' could each be the reflectance; the first is taken"
    )


# --- several files of one surface

NEAR = rows(um=(0.30, 0.35, 0.40, 0.45, 0.50), shares=(0.05,) * 5)
FAR = rows(um=(0.44, 0.48, 0.52, 0.56, 0.60), shares=(0.07,) * 5)
BEYOND = rows(um=(0.55, 0.60, 0.65, 0.70, 0.75), shares=(0.09,) * 5)


@pytest.mark.parametrize("texts", [(NEAR, FAR), (FAR, NEAR)], ids=["in order", "the far one first"])
def test_files_that_overlap_are_joined_in_the_middle(read, texts):
    surface, notices = read(*texts)
    assert surface.wavelength * 1e6 == pytest.approx([0.30, 0.35, 0.40, 0.45, 0.48, 0.52, 0.56, 0.60])
    assert surface.reflectance.tolist() == [0.05] * 4 + [0.07] * 4
    near, far = ("a", "b") if texts[0] is NEAR else ("b", "a")
    assert notices[-1] == (
        f"{near}.csv and {far}.csv, which both hold 0.44 um to 0.5 um, joined at 0.47 um; reflectance steps by +0.020 there"
    )


def test_files_that_do_not_reach_one_another(read):
    surface, notices = read(NEAR, BEYOND)
    assert surface.wavelength.size == 10
    assert (
        notices[-1]
        == "a.csv ends at 0.5 um and b.csv begins at 0.55 um: joined by a straight line; reflectance steps by +0.040 there"
    )


def test_files_that_meet_in_one_point(read):
    surface, notices = read(NEAR, rows(um=(0.5, 0.52, 0.54, 0.56, 0.58), shares=(0.04,) * 5))
    assert surface.reflectance.tolist() == [0.05] * 5 + [0.04] * 4
    assert notices[-1] == "a.csv and b.csv, where they meet, joined at 0.5 um; reflectance steps by -0.010 there"


def test_three_files(read):
    surface, notices = read(BEYOND, NEAR, FAR)
    assert np.all(np.diff(surface.wavelength) > 0.0)
    assert len([notice for notice in notices if "steps by +0.020" in notice]) == 2


def test_a_file_within_another(told):
    inner = rows(um=(0.36, 0.37, 0.38, 0.39, 0.40))
    assert told(NEAR, inner) == [
        (
            "b.csv: lies wholly within the range of a.csv; got 0.36 um to 0.4 um; "
            "allowed: files that carry on one another; leave one of the two out"
        )
    ]


def test_no_file_at_all():
    with pytest.raises(InputError) as caught:
        read_spectrum([])
    assert str(caught.value) == "spectrum: no file given; allowed: one file or several"


# --- what is refused

MEND = "mend or delete the line; notes begin with #"
NAME_IT = "name the unit in the column's head, nm or um; with decimal commas part the columns by semicolons"
FAULTS = {
    "text in the middle": (
        rows() + "0.6,over range\n0.7,0.1\n",
        f"a.csv:7: reflectance is not a number; got 'over range'; {MEND}",
    ),
    "a cell missing": (rows() + "0.6\n0.7,0.1\n", f"a.csv:7: reflectance is not a number; got nothing; {MEND}"),
    "not a number by name": (rows() + "0.6,nan\n0.7,0.1\n", f"a.csv:7: reflectance is not a number; got 'nan'; {MEND}"),
    "infinite by name": (rows() + "inf,0.5\n0.7,0.1\n", f"a.csv:7: wavelength is not a number; got 'inf'; {MEND}"),
    "thousands' commas": (
        rows(sep=";", head="um;fraction") + "1,000.5;0.5\n",
        f"a.csv:7: wavelength is not a number; got '1,000.5'; {MEND}",
    ),
    "no numbers": (
        "wavelength,reflectance\n",
        "a.csv: no row of numbers; got 1 lines; allowed: columns of wavelength and reflectance",
    ),
    "empty": ("", "a.csv: no row of numbers; got 0 lines; allowed: columns of wavelength and reflectance"),
    "one column": (
        "0.3\n0.4\n",
        "a.csv: no row of numbers; got 2 lines; allowed: columns of wavelength and reflectance",
    ),
    "a workbook": (
        b"PK\x03\x04\x00\x00",
        "a.csv: spectrum is not plain text; allowed: a text file in UTF-8; export it as CSV",
    ),
    "few points": (rows(um=UM[:4], shares=SHARES[:4]), "a.csv: too few points; got 4 wavelengths; allowed: at least 5"),
    "above 1": (
        rows(shares=(0.05, 0.06, 1.021, 0.08, 0.09)),
        "a.csv:4: reflectance impossible; got 1.021; allowed: 0 to 1, and 0.02 beyond for noise",
    ),
    "below 0": (
        rows(shares=(0.05, 0.06, 0.07, -0.021, 0.09)),
        "a.csv:5: reflectance impossible; got -0.021; allowed: 0 to 1, and 0.02 beyond for noise",
    ),
    "above 100 %": (
        rows(head="um,R %", shares=(5, 6, 103, 8, 9)),
        "a.csv:4: reflectance impossible; got 103; allowed: 0 to 100 %, and 2 % beyond for noise",
    ),
    "wavelength of 0": (rows(um=(0.0, *UM[1:])), "a.csv:2: wavelength not above 0; got 0; allowed: above 0"),
    "um among nm": (
        rows(head="nm,fraction", um=(0.3, 350.0, 400.0, 450.0, 500.0)),
        f"a.csv:2: wavelength out of range; got 0.3; allowed: 0.1 to 1000 um; the unit was taken as nm; {NAME_IT}",
    ),
    "beyond any spectrum": (
        rows(um=(*UM[:4], 1001.0)),
        f"a.csv:6: wavelength out of range; got 1001; allowed: 0.1 to 1000 um; the unit was taken as um; {NAME_IT}",
    ),
    "absorptance for reflectance": (
        rows(head="wavelength um,absorptance"),
        (
            "a.csv:2: cannot tell which column is the reflectance; got 2 columns headed 'wavelength um', 'absorptance'; "
            "head one of them 'reflectance', or leave the others out"
        ),
    ),
    "three columns without heads": (
        "".join(f"{x},{r},{r}\n" for x, r in zip(UM, SHARES, strict=True)),
        (
            "a.csv:1: cannot tell which column is the wavelength; got 3 columns without heads; "
            "head one of them 'wavelength', or leave the others out"
        ),
    ),
    "three columns, none of them it": (
        "nm,sample 1,sample 2\n" + "".join(f"{x * 1e3},{r},{r}\n" for x, r in zip(UM, SHARES, strict=True)),
        (
            "a.csv:2: cannot tell which column is the reflectance; got 3 columns headed 'nm', 'sample 1', 'sample 2'; "
            "head one of them 'reflectance', or leave the others out"
        ),
    ),
    "commas for everything": (
        "wavelength,reflectance\n0,3,0,05\n0,4,0,06\n",
        (
            "a.csv:2: commas both within the numbers and between them; got '0,3,0,05'; "
            "part the columns by semicolons, or use decimal points"
        ),
    ),
}


@pytest.mark.parametrize("name", FAULTS)
def test_refused(told, name):
    text, message = FAULTS[name]
    assert told(text) == [message]


def test_all_faults_of_a_file_together_and_the_rest_counted(told):
    text = rows() + "".join(f"{x},bad\n" for x in range(1, 15)) + rows(head="# again")
    said = told(text)
    assert [line.partition(":")[2].partition(":")[0] for line in said[:10]] == [str(number) for number in range(7, 17)]
    assert said[10:] == ["a.csv: 4 more faults like these"]


def test_a_missing_file(tmp_path):
    with pytest.raises(InputError) as caught:
        read_spectrum([tmp_path / "none.csv"])
    assert (
        str(caught.value)
        == f"{tmp_path / 'none.csv'}: spectrum cannot be read: No such file or directory; check the path"
    )


# --- tables of optical constants and stack files

TABLE = "wavelength_um,n,k\n" + "".join(
    f"{x},{n},{k}\n" for x, n, k in ((0.3, 1.1, 2), (0.36, 1.2, 2.5), (0.43, 1, 3), (0.5, 1, 4), (0.6, 1, 5))
)
BASE = 'title = "Bench"\n\n[substrate]\nindex_csv = "metal.csv"\n'
STACK = (
    BASE
    + """
[[layer]]
thickness_nm = 80.0
n = 1.45
k = 0.0

[[layer]]
name = "inner"
thickness_nm = 60.0
mixture = {rule = "bruggeman", fraction = 0.25, inclusion_csv = "metal.csv", host_csv = "oxide.csv"}

[[layer]]
thickness_nm = 10.0
index_csv = "oxide.csv"
"""
)


@pytest.fixture
def bench(tmp_path):
    """A folder with two tables, and the stack of a text in it."""
    (tmp_path / "metal.csv").write_text(TABLE)
    (tmp_path / "oxide.csv").write_text(
        "um,n,k\n" + "".join(f"{x},1.7,0.01\n" for x in (0.25, 0.3, 0.35, 0.42, 0.5, 0.55))
    )

    def reading(text: str, *overrides: str):
        (tmp_path / "it.toml").write_text(text)
        return read_stack(tmp_path / "it.toml", overrides)

    return reading


@pytest.fixture
def faults(bench, tmp_path):
    def telling(text: str, *overrides: str) -> list[str]:
        with pytest.raises(InputError) as caught:
            bench(text, *overrides)
        return [str(problem).replace(f"{tmp_path}/", "") for problem in caught.value.problems]

    return telling


def test_a_table_of_optical_constants(bench, tmp_path):
    table = read_index(tmp_path / "metal.csv")
    assert table.wavelength == pytest.approx([0.3e-6, 0.36e-6, 0.43e-6, 0.5e-6, 0.6e-6])
    assert table.refractive_index.tolist() == [1.1 + 2j, 1.2 + 2.5j, 1 + 3j, 1 + 4j, 1 + 5j]
    assert table.notices == ("metal.csv: wavelength in um by its header",)


TABLE_FAULTS = {
    "k below 0": ("0.43,1,3", "0.43,1,-3", "metal.csv:4: k out of range; got -3; allowed: 0 to 1000"),
    "n of 0": ("0.43,1,3", "0.43,0,3", "metal.csv:4: n out of range; got 0; allowed: 0.001 to 100"),
    "k missing": ("0.43,1,3", "0.43,1", f"metal.csv:4: k is not a number; got nothing; {MEND}"),
    "no k at all": (
        TABLE,
        rows(),
        "metal.csv: no row of numbers; got 6 lines; allowed: columns of wavelength, n and k",
    ),
    "too short": ("0.6,1,5\n", "", "metal.csv: too few points; got 4 wavelengths; allowed: at least 5"),
}


@pytest.mark.parametrize("name", TABLE_FAULTS)
def test_a_table_refused(bench, tmp_path, name):
    old, new, message = TABLE_FAULTS[name]
    (tmp_path / "metal.csv").write_text(TABLE.replace(old, new))
    with pytest.raises(InputError) as caught:
        read_index(tmp_path / "metal.csv")
    assert str(caught.value).replace(f"{tmp_path}/", "") == message


def test_a_gap_and_a_doubtful_row_in_a_table(bench, tmp_path):
    (tmp_path / "metal.csv").write_text(TABLE + "1.0,1,5\n1.0,1,7\n")
    assert read_index(tmp_path / "metal.csv").notices[1:] == (
        "metal.csv: 1 wavelengths stand more than once, averaged",
        "metal.csv: readings of one wavelength differ by 2 in n or k, at 1 um",
        "metal.csv: no point between 0.6 um and 1 um: bridged by a straight line",
    )


def test_a_stack(bench, tmp_path):
    stack = bench(STACK)
    assert stack.title == "Bench"
    assert [film.thickness for film in stack.films] == pytest.approx([80e-9, 60e-9, 10e-9])
    assert stack.wavelength.size >= 300
    assert np.all(np.diff(stack.wavelength) > 0.0)
    assert (stack.wavelength[0], stack.wavelength[-1]) == pytest.approx((0.3e-6, 0.55e-6))
    for point in (0.36e-6, 0.35e-6, 0.5e-6):  # of either table
        assert np.abs(stack.wavelength / point - 1.0).min() < 1e-12
    at = int(np.abs(stack.wavelength - 0.43e-6).argmin())
    assert stack.substrate[at] == pytest.approx(1 + 3j)
    assert stack.films[0].refractive_index[at] == 1.45
    metal, oxide = np.array([1 + 3j]), np.array([1.7 + 0.01j])
    assert stack.films[1].refractive_index[at] == pytest.approx(
        bruggeman_1935(inclusion=metal, host=oxide, fraction=0.25)[0]
    )
    assert stack.films[2].refractive_index[at] == pytest.approx(1.7 + 0.01j)
    assert stack.notices == (
        "metal.csv: wavelength in um by its header",
        "oxide.csv: wavelength in um by its header",
        "metal.csv holds 0.3 to 0.6 um; of that 0.3 to 0.55 um, common to all, is used",
        "oxide.csv holds 0.25 to 0.55 um; of that 0.3 to 0.55 um, common to all, is used",
    )


def test_a_bare_base_is_a_stack(bench):
    assert bench(BASE).films == ()


def test_overrides(bench):
    stack = bench(
        STACK, "layer.0.thickness_nm=70", "layer.1.mixture.rule=maxwell-garnett", "layer.1.mixture.fraction=0.35"
    )
    assert stack.films[0].thickness == pytest.approx(70e-9)
    at = int(np.abs(stack.wavelength - 0.43e-6).argmin())
    garnett = maxwell_garnett_1904(inclusion=np.array([1 + 3j]), host=np.array([1.7 + 0.01j]), fraction=0.35)
    assert stack.films[1].refractive_index[at] == pytest.approx(garnett[0])
    assert stack.notices[-1] == "layer.1: Maxwell Garnett's rule is meant for few inclusions, and 0.35 is above 0.3"


def test_an_override_takes_the_other_ways_out(bench):
    assert bench(STACK, "layer.1.index_csv=oxide.csv").films[1].refractive_index[0] == pytest.approx(1.7 + 0.01j)


def test_a_film_too_thick_for_its_fringes(bench):
    """8 points a fringe: ln(0.6 / 0.3) x 8 x 2 x 5 x 20 um / 0.3 um = 3697 for one film, within 4000; two are not."""
    thick = BASE + "\n[[layer]]\nthickness_nm = 20000.0\nn = 5.0\nk = 0.0\n"
    assert bench(thick).wavelength.size == pytest.approx(3697, abs=5)
    two = bench(thick + thick.removeprefix(BASE))
    assert two.notices[-1] == "films so thick that 7394 points would follow their fringes; 4000 are used"


WAYS = "index_csv, or n with k, or mixture"
STACK_FAULTS = {
    "title missing": ('title = "Bench"\n', "", "it.toml: title: required key missing; allowed: text"),
    "base missing": (
        '[substrate]\nindex_csv = "metal.csv"\n',
        "",
        "it.toml: substrate: required key missing; allowed: a table with index_csv",
    ),
    "base without a table": (
        'index_csv = "metal.csv"\n\n',
        "\n",
        "it.toml:3: substrate.index_csv: required key missing; allowed: path of a CSV file",
    ),
    "key missing in a layer": (
        "thickness_nm = 80.0\n",
        "",
        "it.toml:6: layer.0.thickness_nm: required key missing; allowed: 0.1 to 20000 nm",
    ),
    "out of range": (
        "thickness_nm = 60.0",
        "thickness_nm = 0.0",
        "it.toml:13: layer.1.thickness_nm: out of range; got 0.0; allowed: 0.1 to 20000 nm",
    ),
    "within a mixture": (
        "fraction = 0.25",
        "fraction = 1.25",
        "it.toml:14: layer.1.mixture.fraction: out of range; got 1.25; allowed: 0 to 1",
    ),
    "unknown rule": (
        '"bruggeman"',
        '"lichtenecker"',
        "it.toml:14: layer.1.mixture.rule: unknown name; got 'lichtenecker'; allowed: 'bruggeman', 'maxwell-garnett'",
    ),
    "unknown key, near another": (
        "thickness_nm = 80.0",
        "thickness_mm = 80.0\nthickness_nm = 80.0",
        "it.toml:7: layer.0.thickness_mm: unknown key; did you mean thickness_nm?",
    ),
    "unknown key, near none": (
        "n = 1.45",
        "n = 1.45\nqqq = 1",
        "it.toml:9: layer.0.qqq: unknown key; allowed: name, thickness_nm, index_csv, n, k, mixture",
    ),
    "text for a number": (
        "n = 1.45",
        'n = "1.45"',
        "it.toml:8: layer.0.n: wrong type; got '1.45' (text); allowed: 0.001 to 100",
    ),
    "number for a table": (
        '{rule = "bruggeman", fraction = 0.25, inclusion_csv = "metal.csv", host_csv = "oxide.csv"}',
        "3",
        "it.toml:14: layer.1.mixture: wrong type; got 3; allowed: a table of rule, fraction, inclusion_csv, host_csv",
    ),
    "empty name": ('name = "inner"', 'name = ""', "it.toml:12: layer.1.name: is empty; allowed: text"),
    "no index": ('index_csv = "oxide.csv"\n', "", f"it.toml:16: layer.2.index_csv: nothing given; allowed: {WAYS}"),
    "n without k": (
        "k = 0.0\n",
        "",
        f"it.toml:6: layer.0.k: required key missing beside its companions; allowed: {WAYS}",
    ),
    "two ways": (
        "k = 0.0\n",
        'k = 0.0\nindex_csv = "oxide.csv"\n',
        f"it.toml:9: layer.0.k: keys that exclude each other; got index_csv, n, k; allowed: {WAYS}",
    ),
    "a file that no system takes": (
        'host_csv = "oxide.csv"',
        f'host_csv = "{"x" * 300}"',
        f"it.toml:14: layer.1.mixture.host_csv: no such file; got {'x' * 300!r}; looked for {'x' * 300}",
    ),
    "a file that is not there": (
        'host_csv = "oxide.csv"',
        'host_csv = "oxid.csv"',
        "it.toml:14: layer.1.mixture.host_csv: no such file; got 'oxid.csv'; looked for oxid.csv",
    ),
}


@pytest.mark.parametrize("name", STACK_FAULTS)
def test_a_stack_refused(faults, name):
    old, new, message = STACK_FAULTS[name]
    assert STACK.count(old) == 1
    assert faults(STACK.replace(old, new)) == [message]


def test_faults_of_a_stack_and_of_its_tables_come_together(faults, tmp_path):
    assert len(faults(STACK.replace("80.0", "-1.0").replace("0.25", "2.5"))) == 2
    (tmp_path / "metal.csv").write_text(TABLE.replace("0.43,1,3", "0.43,0,-3"))
    (tmp_path / "oxide.csv").unlink()
    assert faults(STACK) == [
        "metal.csv:4: n out of range; got 0; allowed: 0.001 to 100",
        "it.toml:14: layer.1.mixture.host_csv: no such file; got 'oxide.csv'; looked for oxide.csv",
        "it.toml:18: layer.2.index_csv: no such file; got 'oxide.csv'; looked for oxide.csv",
    ]


def test_tables_with_nothing_in_common(faults, tmp_path):
    (tmp_path / "oxide.csv").write_text("um,n,k\n" + "".join(f"{x},1.7,0.01\n" for x in (2, 2.2, 2.4, 2.6, 2.8)))
    assert faults(STACK) == [
        "it.toml: tables have no range of wavelengths in common; got metal.csv 0.3 to 0.6 um; oxide.csv 2 to 2.8 um"
    ]


PLACE = "a list's entry goes by its number, from 0, and must exist: layer.0.thickness_nm=70"
OVERRIDES = {
    "no such layer": ("layer.9.n=2", f"--set: no such place in the stack file; got 'layer.9.n=2'; {PLACE}"),
    "no such table": ("base.index_csv=x", "--set: base: unknown key; allowed: title, substrate, layer"),
    "a layer by name": ("layer.inner.n=2", f"--set: no such place in the stack file; got 'layer.inner.n=2'; {PLACE}"),
    "into a number": ("layer.0.n.m=2", f"--set: no such place in the stack file; got 'layer.0.n.m=2'; {PLACE}"),
    "no value": ("layer.0.n", "--set: not an override; got 'layer.0.n'; allowed: key.path=value"),
    "out of range": ("layer.0.n=0", "--set: layer.0.n: out of range; got 0; allowed: 0.001 to 100"),
    "unknown key": ("layer.0.thick=2", "--set: layer.0.thick: unknown key; did you mean thickness_nm?"),
}


@pytest.mark.parametrize("name", OVERRIDES)
def test_an_override_refused(faults, name):
    option, message = OVERRIDES[name]
    assert faults(STACK, option) == [message]


def test_stack_files_that_are_not_read(faults, tmp_path):
    missing = tmp_path / "none.toml"
    with pytest.raises(InputError) as caught:
        read_stack(missing)
    assert str(caught.value) == f"{missing}: stack file cannot be read: No such file or directory; check the path"
    (broken,) = faults(STACK.replace("n = 1.45", "n = 1,45"))
    assert broken.startswith("it.toml:8: not valid TOML: ")
    assert broken.endswith("; text in quotes, decimals with a point, one key a line")
    latin = tmp_path / "latin.toml"
    latin.write_bytes('title = "B\u00e4nk"'.encode("latin-1"))
    with pytest.raises(InputError) as caught:
        read_stack(latin)
    assert str(caught.value) == f"{latin}: stack file is not UTF-8 text; allowed: a TOML file in UTF-8"


def test_a_crowd_of_layers(faults):
    crowd = BASE + "\n[[layer]]\nthickness_nm = 1.0\nn = 1.5\nk = 0.0\n" * 51
    assert faults(crowd) == ["it.toml:6: layer: too many entries; got 51; allowed: at most 50"]


# --- the examples


def solar(surface) -> float:
    sun = get_reference_spectra(standard="ASTM G173-03")["global"]
    return solar_absorptance(surface, wavelength=sun.index.to_numpy() * 1e-9, irradiance=sun.to_numpy()).value


def at_100_C(surface) -> float:
    return float(emittance(surface, t=np.array([100.0 + zero_Celsius])).value[0])


# Made to come out so, to half of the last digit: pairs of their classes in the catalogue
EXAMPLES = [("selective.csv", 0.95, 0.05), ("black-paint.csv", 0.96, 0.92)]


@pytest.mark.parametrize(("name", "absorptance", "at_100"), EXAMPLES)
def test_example_spectra(name, absorptance, at_100):
    found = read_spectrum([COATINGS / name])
    assert solar(found.spectrum) == pytest.approx(absorptance, abs=0.005)
    assert at_100_C(found.spectrum) == pytest.approx(at_100, abs=0.005)
    assert len(found.notices) == 2  # the units, and nothing else
    turns = cut_off(found.spectrum)
    assert (turns is None) if name == "black-paint.csv" else (turns == pytest.approx(2.3e-6, abs=0.1e-6))


def test_example_stack():
    """An absorbing pair within the class of vacuum-deposited cermets; it radiates more to the side than straight ahead."""
    stack = read_stack(COATINGS / "cermet-stack.toml")
    normal, hemispherical = (
        of(stack.wavelength, films=stack.films, substrate=stack.substrate)
        for of in (normal_spectrum, hemispherical_spectrum)
    )
    assert 0.90 <= solar(normal) <= 0.95
    assert 0.04 <= at_100_C(normal) < at_100_C(hemispherical) <= 0.08


@pytest.mark.parametrize("path", sorted(COATINGS.iterdir()), ids=lambda path: path.name)
def test_every_example_says_that_it_is_invented(path):
    assert path.read_text(encoding="utf-8").startswith("# invented for demonstration")
