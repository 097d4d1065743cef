"""The command line. At load it imports click and nothing else, so that help comes at once."""

from __future__ import annotations

import sys
from collections.abc import Callable
from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

if TYPE_CHECKING:
    from collector.study.account import Run

__all__ = ["main"]

VERSION = "0.1.0"  # a literal: asking the package's metadata costs a third of the time that help may take
WRONG_INPUT, NOT_SOUND = 2, 3


class _Commands(click.Group):
    """A group whose commands end in a message and exit code 2 where the input is wrong."""

    def invoke(self, ctx: click.Context) -> Any:
        try:
            return super().invoke(ctx)
        except Exception as fault:
            problems = getattr(fault, "problems", None)
            if problems is None:
                raise
            for problem in problems:
                click.echo(f"noonplate: {problem}", err=True)
            if len(problems) > 1:
                click.echo(f"noonplate: {len(problems)} faults", err=True)
            ctx.exit(WRONG_INPUT)


@click.group(cls=_Commands, context_settings={"help_option_names": ["-h", "--help"], "max_content_width": 80})
@click.version_option(VERSION, prog_name="noonplate")
def main() -> None:
    """Kilowatt-hours a year from a flat-plate solar thermal collector.

    Computed from its build sheet and a weather file, hour by hour, from first principles, with the sources shown.

    Exit codes: 0 done; 2 the input is wrong; 3 it ran, but some hours did not converge or the sums do not close; 1 a bug.
    """


Decorator = Callable[[Callable[..., None]], Callable[..., None]]
_json: Decorator = click.option("--json", "as_json", is_flag=True, help="One JSON object instead of text.")
_set: Decorator = click.option(
    "--set",
    "overrides",
    multiple=True,
    metavar="KEY=VALUE",
    help="Override a scenario key, such as fluid.flow_kg_s_m2=0.01.",
)
_scenario: Decorator = click.argument("scenario", type=click.Path(path_type=Path))
_accept: Decorator = click.option(
    "--accept",
    multiple=True,
    metavar="NAME",
    help="Live with a grave finding about the weather file; as place.accept in the scenario.",
)


def _emit(content: dict[str, Any], *, text: Callable[[], str], as_json: bool) -> None:
    from collector.show.files import json_text

    click.echo(json_text(content) if as_json else text(), nl=False)


@main.command()
@click.argument("scenarios", metavar="SCENARIO...", nargs=-1, required=True, type=click.Path(path_type=Path))
@_set
@_accept
@click.option(
    "--out",
    type=click.Path(path_type=Path, file_okay=True),
    metavar="DIR",
    help="Also write summary.json, months.csv, hours.csv and two figures a run.",
)
@_json
def year(
    scenarios: tuple[Path, ...], overrides: tuple[str, ...], accept: tuple[str, ...], out: Path | None, as_json: bool
) -> None:
    """The year of heat: totals, months, where the sunlight went.

    Several scenarios, or several temperatures in one, give a comparison.
    """
    from collector.build.reading import read_scenario
    from collector.show.files import open_folder
    from collector.show.tables import comparison_text, year_text
    from collector.study.account import runs_of

    checked = [(read_scenario(path, overrides=overrides).accepting(accept), path.parent) for path in scenarios]
    if out is not None:
        open_folder(out)
    runs = [run for scenario, base in checked for run in runs_of(scenario, base=base)]
    accounts = [run.account for run in runs]
    content = {"runs": accounts}
    if out is not None:
        _write(runs, content, out=out)
    _emit(
        content, text=lambda: year_text(accounts[0]) if len(runs) == 1 else comparison_text(accounts), as_json=as_json
    )
    if not all(run.sound for run in runs):
        click.echo("noonplate: hours without convergence, or sums that do not close: see the result", err=True)
        sys.exit(NOT_SOUND)


def _write(runs: list[Run], content: dict[str, Any], *, out: Path) -> None:
    """Tables and figures of all runs; figures are numbered where there are several."""
    from collector.show.files import csv_text, json_text, write_whole
    from collector.show.plots import FIGURES, save_figure
    from collector.study.account import HOUR_COLUMNS, hours_table

    months = [(number, *month.values()) for number, run in enumerate(runs, start=1) for month in run.account["months"]]
    hours = (
        (number, *row)
        for number, run in enumerate(runs, start=1)
        for row in zip(
            *(column if isinstance(column, list) else column.tolist() for column in hours_table(run).values()),
            strict=True,
        )
    )
    texts = {
        "summary.json": json_text(content),
        "months.csv": csv_text(["run", *runs[0].account["months"][0]], months),
        "hours.csv": csv_text(["run", *HOUR_COLUMNS], hours),
    }
    for name, text in texts.items():
        write_whole(out / name, write=lambda path, text=text: path.write_text(text, encoding="utf-8"))  # type: ignore[misc] # mypy can't type a default in a lambda
    for number, run in enumerate(runs, start=1):
        for name, draw in FIGURES.items():
            figure = draw(run.account)
            place = out / (f"{name}.png" if len(runs) == 1 else f"{name}-{number}.png")
            write_whole(place, write=lambda path, figure=figure: save_figure(figure, path=path))  # type: ignore[misc]
    click.echo(f"written to {out}: {', '.join(texts)}, {len(FIGURES) * len(runs)} figures", err=True)


@main.command()
@_scenario
@click.option("--beam", type=float, required=True, help="Beam irradiance on the plane, W/m2.")
@click.option("--sky-diffuse", type=float, required=True, help="Diffuse from the sky on the plane, W/m2.")
@click.option("--ground", type=float, required=True, help="Reflected from the ground on the plane, W/m2.")
@click.option("--incidence", type=float, required=True, help="Angle of incidence of the beam, deg.")
@click.option("--air", type=float, required=True, help="Air temperature, C.")
@click.option("--sky-temp", type=float, required=True, help="Sky temperature, C.")
@click.option("--ground-temp", type=float, help="Ground temperature, C; the air's if not given.")
@click.option("--wind", type=float, required=True, help="Wind at the collector, m/s.")
@click.option("--inlet", type=float, help="Fluid inlet temperature, C.")
@click.option("--mean", type=float, help="Or: mean fluid temperature, C.")
@click.option("--stagnation", is_flag=True, help="Or: no flow.")
@_set
@_json
def point(scenario: Path, overrides: tuple[str, ...], stagnation: bool, as_json: bool, **given: float | None) -> None:
    """One operating point by hand.

    U values are slopes at the plate's temperature; F' and F_R belong to that slope. The scenario's weather is not read.
    """
    if sum([stagnation, given["inlet"] is not None, given["mean"] is not None]) != 1:
        raise click.UsageError("give exactly one of --inlet, --mean and --stagnation")
    from collector.build.reading import read_scenario
    from collector.show.tables import point_text
    from collector.study.point import Point, solve_point

    if given["ground_temp"] is None:
        given["ground_temp"] = given["air"]
    stands = Point(**given)  # type: ignore[arg-type] # click has seen to the required ones
    found = solve_point(read_scenario(scenario, overrides=overrides), stands)
    _emit(found, text=lambda: point_text(found), as_json=as_json)
    if not found["converged"]:
        click.echo("noonplate: the balance did not converge: see the result", err=True)
        sys.exit(NOT_SOUND)


@main.command()
@click.argument("scenarios", metavar="SCENARIO...", nargs=-1, required=True, type=click.Path(path_type=Path))
@click.option("--irradiance", type=float, default=1000.0, show_default=True, help="Beam on the plane, W/m2.")
@click.option("--air", type=float, default=20.0, show_default=True, help="Air temperature, C.")
@click.option("--wind", type=float, default=3.0, show_default=True, help="Wind at the collector, m/s.")
@click.option("--sky-temp", type=float, help="Sky temperature, C; if not given, long wave 100 W/m2 below the air's.")
@click.option("--to", type=float, help="Highest mean fluid above the air, K; 80 if the fluid's data go so far.")
@click.option("--at", type=float, default=40.0, show_default=True, help="Working point to read off, K above the air.")
@click.option("--terms", is_flag=True, help="Fit wind and long-wave terms too.")
@click.option(
    "--out", type=click.Path(path_type=Path), metavar="DIR", help="Also write curve.json, points.csv and the figure."
)
@_set
@_json
def curve(
    scenarios: tuple[Path, ...],
    overrides: tuple[str, ...],
    terms: bool,
    out: Path | None,
    as_json: bool,
    **given: float | None,
) -> None:
    """Efficiency curve, coefficients, incidence modifiers, stagnation.

    As a test laboratory would have them, at normal incidence. Several scenarios overlay in one figure.
    """
    from collector.build.reading import read_scenario
    from collector.show.curve import curve_text
    from collector.study.curve import Bench, curve_of

    bench = Bench(**given)  # type: ignore[arg-type] # click has seen to the types
    found = [curve_of(read_scenario(path, overrides=overrides), bench, terms=terms) for path in scenarios]
    content = {"curves": found}
    if out is not None:
        _write_curves(found, content, out=out)
    _emit(content, text=lambda: "\n".join(curve_text(each) for each in found), as_json=as_json)


def _write_curves(curves: list[dict[str, Any]], content: dict[str, Any], *, out: Path) -> None:
    from collector.show.curve import draw_curves
    from collector.show.files import csv_text, json_text, open_folder, write_whole
    from collector.show.plots import save_figure

    open_folder(out)
    rows = [(number, *point.values()) for number, each in enumerate(curves, start=1) for point in each["points"]]
    texts = {"curve.json": json_text(content), "points.csv": csv_text(["curve", *curves[0]["points"][0]], rows)}
    for name, text in texts.items():
        write_whole(out / name, write=lambda path, text=text: path.write_text(text, encoding="utf-8"))  # type: ignore[misc]
    figure = draw_curves(curves)
    write_whole(out / "curve.png", write=lambda path: save_figure(figure, path=path))
    click.echo(f"written to {out}: {', '.join(texts)}, curve.png", err=True)


@main.command()
@_scenario
@click.argument("points", type=click.Path(path_type=Path))
@click.option("--terms", help="Coefficients to fit, such as eta0,a1_W_m2K; those that the points vary if not given.")
@click.option("--drop", is_flag=True, help="Take out the terms that the points can't support.")
@click.option("--parameter", "parameters", multiple=True, metavar="KEY", help="Fit this number of the build instead.")
@click.option(
    "--out", type=click.Path(path_type=Path), metavar="DIR", help="Also write fit.json and the residuals' figure."
)
@_set
@_json
def fit(
    scenario: Path,
    points: Path,
    terms: str | None,
    drop: bool,
    parameters: tuple[str, ...],
    out: Path | None,
    overrides: tuple[str, ...],
    as_json: bool,
) -> None:
    """Coefficients, or parameters of the build, from measured points.

    POINTS is a CSV file whose column names carry their units: irradiance_W_m2 (or beam_W_m2 and diffuse_W_m2), air_C, mean_C (or
    inlet_C and outlet_C), wind_m_s, power_W_m2 (or power_W, efficiency, flow_kg_s); and, if known, incidence_deg, sky_C,
    uncertainty_W_m2.
    """
    from collector.build.points import read_points
    from collector.build.reading import read_scenario
    from collector.show.fit import fit_text
    from collector.study.fit import fitted_of

    checked = read_scenario(scenario, overrides=overrides)
    table, fluid = checked.collector, checked.fluid
    measured = read_points(
        points, area=table.length_m * table.width_m, fluid=fluid.name, mass_fraction=fluid.mass_fraction
    )
    asked = [term.strip() for term in terms.split(",")] if terms else None
    found = fitted_of(checked, measured, terms=asked, drop=drop, parameters=parameters)
    if out is not None:
        _write_fit(found, out=out)
    _emit(found, text=lambda: fit_text(found), as_json=as_json)


def _write_fit(found: dict[str, Any], *, out: Path) -> None:
    from collector.show.files import json_text, open_folder, write_whole
    from collector.show.fit import draw_residuals
    from collector.show.plots import save_figure

    open_folder(out)
    write_whole(out / "fit.json", write=lambda path: path.write_text(json_text(found), encoding="utf-8"))
    figure = draw_residuals(found)
    write_whole(out / "residuals.png", write=lambda path: save_figure(figure, path=path))
    click.echo(f"written to {out}: fit.json, residuals.png", err=True)


_out_folder: Decorator = click.option(
    "--out", type=click.Path(path_type=Path), metavar="DIR", help="Also write the summary, the table and the figures."
)
_metal: Decorator = click.option(
    "--hemispherical",
    type=click.Choice(["metal"]),
    help="Take a measured spectrum's emittance from normal to hemispherical, as a metal's.",
)


@main.command()
@click.argument("files", metavar="FILE...", nargs=-1, required=True, type=click.Path(path_type=Path))
@click.option("--set", "overrides", multiple=True, metavar="KEY=VALUE", help="Override a key of the stack.")
@click.option("--working", type=float, default=60.0, show_default=True, help="Plate temperature in use, C.")
@click.option("--stagnation", type=float, default=200.0, show_default=True, help="Plate temperature without flow, C.")
@_metal
@_out_folder
@_json
def surface(
    files: tuple[Path, ...],
    overrides: tuple[str, ...],
    working: float,
    stagnation: float,
    hemispherical: str | None,
    out: Path | None,
    as_json: bool,
) -> None:
    """Absorptance and emittance of one surface.

    FILE is a CSV file of reflectance over wavelength, or several of one surface to be joined; or one stack of films in TOML.
    """
    from collector.show.files import open_folder
    from collector.show.surface_tables import surface_text
    from collector.study.surface import study_surface

    found, curves = study_surface(
        files, overrides=overrides, working=working, stagnation=stagnation, metal=hemispherical is not None
    )
    if out is not None:
        from collector.show.coating_files import write_surface

        open_folder(out)
        click.echo(f"written to {out}: {', '.join(write_surface(found, curves=curves, out=out))}", err=True)
    _emit(found, text=lambda: surface_text(found), as_json=as_json)


@main.command()
@_scenario
@click.option(
    "--coating",
    "names",
    multiple=True,
    required=True,
    metavar="A",
    help="Two or more: a name of the catalogue, a pair such as 0.95/0.05, a CSV spectrum, a stack in TOML.",
)
@_metal
@click.option("--limit", type=float, default=150.0, show_default=True, help="Count hours of a plate above this, C.")
@click.option("--sigma-alpha", type=float, default=0.005, show_default=True, help="Uncertainty of each absorptance.")
@click.option("--sigma-eps", type=float, default=0.01, show_default=True, help="Uncertainty of each emittance.")
@click.option("--draws", type=int, default=2000, show_default=True, help="Of the uncertainty.")
@click.option("--seed", type=int, default=0, show_default=True, help="Of the draws.")
@click.option("--price", type=float, help="Of heat, money per kWh: adds what the difference is worth.")
@click.option("--life", type=float, default=20.0, show_default=True, help="Years that the difference lasts.")
@click.option("--discount", type=float, default=0.03, show_default=True, help="Discount rate a year.")
@click.option("--aged", metavar="DA,DE", help="Change of absorptance and emittance by age, such as -0.02,0.03.")
@click.option("--weight", type=float, default=0.5, show_default=True, help="Of emittance in the ageing criterion.")
@click.option("--test-temperature", type=float, help="Of an ageing test, C; goes with --activation.")
@click.option("--activation", type=float, help="Activation energy of ageing, kJ/mol.")
@_set
@_out_folder
@_json
def coatings(
    scenario: Path,
    names: tuple[str, ...],
    hemispherical: str | None,
    aged: str | None,
    overrides: tuple[str, ...],
    out: Path | None,
    as_json: bool,
    **given: Any,
) -> None:
    """Coatings against each other: same collector, same year.

    The scenario's own coating is not used; differences are to the first coating named.
    """
    from collector.build.candidates import read_candidates
    from collector.build.reading import read_scenario
    from collector.show.coating_tables import coatings_text
    from collector.show.files import open_folder
    from collector.study.asked import Asked, changes_of
    from collector.study.coatings import study_coatings

    asked = Asked(**given, aged=changes_of(aged))
    checked = read_scenario(scenario, overrides=overrides)
    found = study_coatings(
        checked, read_candidates(names, metal=hemispherical is not None), base=scenario.parent, asked=asked
    )
    if out is not None:
        from collector.show.coating_files import write_coatings

        open_folder(out)
        names = tuple(write_coatings(found.account, plane=found.plane, out=out))
        click.echo(f"written to {out}: {', '.join(names)}", err=True)
    _emit(found.account, text=lambda: coatings_text(found.account), as_json=as_json)
    if not found.sound:
        click.echo("noonplate: hours without convergence: see the result", err=True)
        sys.exit(NOT_SOUND)


@main.command()
@_scenario
@click.option(
    "--weather",
    "names",
    multiple=True,
    required=True,
    metavar="FILE|STATION",
    help="Three or more years: files, stations, or one file of several calendar years.",
)
@_set
@_accept
@click.option("--out", type=click.Path(path_type=Path), metavar="DIR", help="Also write years.csv and the figure.")
@_json
def years(
    scenario: Path,
    names: tuple[str, ...],
    overrides: tuple[str, ...],
    accept: tuple[str, ...],
    out: Path | None,
    as_json: bool,
) -> None:
    """How years differ: mean, spread, and what nine in ten exceed.

    The scenario's own weather is not used. Paths count from the current folder.
    """
    from collector.build.reading import read_scenario
    from collector.show.files import open_folder
    from collector.show.years import write_years, years_text
    from collector.study.years import study_years

    checked = read_scenario(scenario, overrides=overrides).accepting(accept)
    if out is not None:
        open_folder(out)
    found = study_years(checked, names=names, base=Path())
    if out is not None:
        click.echo(f"written to {out}: {', '.join(write_years(found.account, out=out))}", err=True)
    _emit(found.account, text=lambda: years_text(found.account), as_json=as_json)
    if not found.sound:
        click.echo("noonplate: hours without convergence: see the result", err=True)
        sys.exit(NOT_SOUND)


@main.command()
@click.argument("climate", type=click.Path(path_type=Path))
@click.option("--seed", type=click.IntRange(min=0), default=0, show_default=True, help="Of the year's chance.")
@click.option("--out", type=click.Path(path_type=Path), metavar="FILE", required=True, help="EPW file to write.")
@click.option("--clear-sky", is_flag=True, help="No cloud all year: an upper bound, not the climate's year.")
@click.option("--replace", is_flag=True, help="Write over the file if there is one.")
@_json
def synthesise(climate: Path, seed: int, out: Path, clear_sky: bool, replace: bool, as_json: bool) -> None:
    """An hourly year from twelve monthly means.

    CLIMATE is a TOML file: a place, and for each month the sunlight and the air temperature, and more where known, as in
    scenarios/climate/tarn-hollow.toml. The year is written as an EPW file that a scenario can name.
    """
    from collector.build.climatefile import read_climate
    from collector.show.climate import refuse_taken, synthesis_text, write_year
    from collector.study.synthesis import synthetic_year

    refuse_taken(out, replace=replace, source=climate)
    found, text = synthetic_year(read_climate(climate), seed=seed, clear_sky=clear_sky, source=climate.name)
    write_year(out, text, replace=replace)
    _emit({"written": str(out)} | found, text=lambda: synthesis_text(found), as_json=as_json)
    click.echo(f"written: {out}", err=True)


@main.command()
@click.argument("file", type=click.Path(path_type=Path))
@_json
def new(file: Path, as_json: bool) -> None:
    """Write a starter scenario, each key explained."""
    from importlib.resources import files

    from collector.show.files import write_new

    write_new(file, (files("collector.build") / "data" / "starter.toml").read_text(encoding="utf-8"))
    _emit(
        {"written": str(file)},
        text=lambda: f"written: {file}\nnext: noonplate check {file}; noonplate year {file}\n",
        as_json=as_json,
    )


@main.command()
@_scenario
@_set
@_accept
@_json
def check(scenario: Path, overrides: tuple[str, ...], accept: tuple[str, ...], as_json: bool) -> None:
    """Check a scenario and its weather file without solving the year."""
    from collector.build.reading import read_scenario
    from collector.show.tables import check_text
    from collector.study.account import inspected

    found = inspected(read_scenario(scenario, overrides=overrides).accepting(accept), base=scenario.parent)
    _emit(found, text=lambda: check_text(found), as_json=as_json)


@main.command()
@click.argument("name", metavar="FILE|STATION")
@click.option("--out", type=click.Path(path_type=Path), metavar="DIR", help="Also write weather.json and the figure.")
@_json
def weather(name: str, out: Path | None, as_json: bool) -> None:
    """What is in a weather file, and what is wrong with it.

    Place, format, gaps, time stamps, findings and sums of a weather file or a bundled station. The name of a scenario in TOML
    stands for the weather that it names, with the columns it maps.
    """
    from collector.show.weather_page import weather_text
    from collector.study.weather import survey_of

    found = survey_of(name, base=Path())
    if out is not None:
        from collector.show.files import json_text, open_folder, write_whole
        from collector.show.plots import save_figure
        from collector.show.weather_plots import draw_weather

        open_folder(out)
        text, figure = json_text(found.account), draw_weather(found.account, found.curves)
        write_whole(out / "weather.json", write=lambda path: path.write_text(text, encoding="utf-8"))
        write_whole(out / "weather.png", write=lambda path: save_figure(figure, path=path))
        click.echo(f"written to {out}: weather.json, weather.png", err=True)
    _emit(found.account, text=lambda: weather_text(found.account), as_json=as_json)


@main.command()
@_json
def schema(as_json: bool) -> None:
    """Print the scenario file's JSON schema, for editors."""
    del as_json  # it is JSON either way
    from collector.build.scenario import Scenario

    _emit(Scenario.model_json_schema(), text=str, as_json=True)


@main.command()
@_json
def models(as_json: bool) -> None:
    """Every relation in use, with its source."""
    from collector.build.relations import relations
    from collector.show.tables import models_text

    found = relations()
    _emit(dict(found), text=lambda: models_text(found), as_json=as_json)


@main.command()
@click.argument("shelf", required=False, type=click.Choice(["covers", "coatings", "metals", "insulation"]))
@_json
def catalogue(shelf: str | None, as_json: bool) -> None:
    """Generic materials, with their sources."""
    from collector.build.catalogue import SHELVES
    from collector.build.catalogue import shelf as entries
    from collector.show.tables import catalogue_text

    found = {name: entries(name) for name in ([shelf] if shelf else SHELVES)}
    _emit(dict(found), text=lambda: catalogue_text(found), as_json=as_json)
