"""The command line: parse, call the API, print. Heavy modules are imported inside each command."""

from __future__ import annotations

import json
import os
import shutil
import sys
from collections.abc import Callable, Mapping
from pathlib import Path
from typing import TYPE_CHECKING, Any, TypeVar

import click

from vetter.errors import InputError

if TYPE_CHECKING:
    from vetter.results.verdicts import Verdicts
    from vetter.system.model import System

# The matrices here are small: threads of the linear algebra library would only wait for each other.
for variable in ("OPENBLAS_NUM_THREADS", "MKL_NUM_THREADS", "OMP_NUM_THREADS"):
    os.environ.setdefault(variable, "1")

F = TypeVar("F", bound=Callable[..., Any])

INTERRUPTED = 130


class Commands(click.Group):
    """A group whose commands turn bad input into one message and exit code 2."""

    def invoke(self, ctx: click.Context) -> object:
        """Run the command; InputError is exit code 2, an interruption 130."""
        try:
            return super().invoke(ctx)
        except InputError as error:
            click.echo(f"vetter: {error}", err=True)
            ctx.exit(2)
        except KeyboardInterrupt:
            click.echo("vetter: interrupted; nothing was written", err=True)
            ctx.exit(INTERRUPTED)


@click.group(cls=Commands, context_settings={"help_option_names": ["-h", "--help"], "max_content_width": 100})
@click.version_option(package_name="companion-vetter", prog_name="vetter")
def main() -> None:
    """Say which ordinary explanations of an unseen stellar companion the measurements exclude, and why."""


def system_argument(command: F) -> F:
    """Add the system file; its faults are reported by the reader, not by the parser."""
    return click.argument("system_file", metavar="SYSTEM.toml", type=click.Path(path_type=Path))(command)


def json_option(command: F) -> F:
    """Add --json."""
    return click.option("--json", "as_json", is_flag=True, help="JSON on stdout, nothing else there.")(command)


def grid_option(command: F) -> F:
    """Add --grid."""
    help_text = "Your own atmospheres, made with `vetter grids add`."
    return click.option("--grid", metavar="NAME", help=help_text)(command)


def run_options(command: F) -> F:
    """Add --seed, --quiet and --grid, which every long run takes."""
    seed = click.option("--seed", default=0, show_default=True, help="Same seed and input, same output.")
    quiet = click.option("--quiet", is_flag=True, help="Print no progress.")
    return seed(quiet(grid_option(command)))


def emit(result: object, text: str, as_json: bool) -> None:
    """Print a result on stdout, as JSON or as text."""
    click.echo(json.dumps(result, indent=1, allow_nan=False) if as_json else text.rstrip("\n"))


@main.command()
@system_argument
@json_option
@click.option("--seed", default=0, show_default=True, help="Seed of the Monte Carlo over the input errors.")
def inspect(system_file: Path, as_json: bool, seed: int) -> None:
    """Show what the orbit needs: mass function, least mass, Roche lobe, light an ordinary companion would add."""
    from vetter import read_system
    from vetter.results.inspection import inspect as look
    from vetter.results.inspection import render_inspection

    found = look(read_system(system_file), seed)
    emit(found, render_inspection(found), as_json)


@main.command()
@system_argument
@json_option
@click.option("--out", "directory", type=click.Path(path_type=Path), help="Also write tables and a figure there.")
@click.option("--scenario", "scenarios", multiple=True, help="Only this scenario (repeatable).")
@click.option("--third-light", is_flag=True, help="Also try an unrelated star in the aperture: unrelated_light.")
@run_options
def evaluate(
    system_file: Path,
    as_json: bool,
    directory: Path | None,
    scenarios: tuple[str, ...],
    third_light: bool,
    seed: int,
    quiet: bool,
    grid: str | None,
) -> None:
    """Fit every explanation to everything that was measured and print the table of verdicts."""
    from vetter import evaluate as run
    from vetter import read_system
    from vetter.results.table import render

    system = read_system(system_file)
    if directory is not None:
        check_folder(directory)
    names = with_third_light(scenarios) if third_light else scenarios
    verdicts = run(system, names or None, seed, progress=None if quiet else say_progress, grid=grid)
    say_progress("")
    if directory is not None:
        write_results(system, verdicts, directory, grid)
    emit(verdicts.to_dict(), "" if as_json else render(verdicts, shutil.get_terminal_size((120, 40)).columns), as_json)


@main.command()
@system_argument
@json_option
@click.option("--between", nargs=2, metavar="A B", help="Two explanations, one of them at least a pair.")
@click.option("--out", "directory", type=click.Path(path_type=Path), help="Also write the JSON and a figure there.")
@click.option("--n-body", is_flag=True, help="Integrate the most favourable pairs (needs the package rebound).")
@run_options
def contrast(
    system_file: Path,
    as_json: bool,
    between: tuple[str, str] | None,
    directory: Path | None,
    n_body: bool,
    seed: int,
    quiet: bool,
    grid: str | None,
) -> None:
    """Inner pair versus single companion: light, orbit and epoch velocities together, and what is left of the pair."""
    from vetter import contrast as run
    from vetter import read_system
    from vetter.pairs.report import files, render

    system = read_system(system_file)
    if directory is not None:
        check_folder(directory)
    found = run(system, between, seed, n_body, None if quiet else say_progress, grid)
    say_progress("")
    if directory is not None:
        write_files(directory, files(found))
    emit(found.to_dict(), "" if as_json else render(found, shutil.get_terminal_size((120, 40)).columns), as_json)


def with_third_light(names: tuple[str, ...]) -> tuple[str, ...]:
    """Return the scenarios asked for, or all the usual ones, and the unrelated star in the aperture."""
    from vetter.scenarios.base import registered

    return (*(names or registered()), "unrelated_light")


def say_progress(words: str) -> None:
    """Show on a terminal what is being worked on; an empty text clears the line."""
    if sys.stderr.isatty():
        click.echo(f"\r\033[K{words}", err=True, nl=False)


def check_folder(directory: Path) -> None:
    """Raise InputError before any work when the results could not be written there."""
    if directory.exists() and not directory.is_dir():
        raise InputError.single("--out", "", str(directory), "a folder, but it is a file", "Name another folder.")


def write_results(system: System, verdicts: Verdicts, directory: Path, grid: str | None = None) -> None:
    """Write verdicts.json, .csv, .ecsv and the figure, all or none."""
    from vetter.evaluation import prepare
    from vetter.observations.photometry import PhotometryObservation
    from vetter.results import export
    from vetter.results.figures.pictures import chosen_case
    from vetter.results.figures.spectral_energy import spectral_energy
    from vetter.results.figures.style import figure_bytes

    context, observations = prepare(system, grid)
    photometry = next(o for o in observations if isinstance(o, PhotometryObservation))
    figure = spectral_energy(verdicts.scenarios, chosen_case(verdicts.scenarios), context, photometry)
    files: dict[str, str | bytes] = {
        "verdicts.json": export.to_json(verdicts),
        "verdicts.csv": export.to_csv(verdicts),
        "verdicts.ecsv": export.to_ecsv(verdicts),
        "magnitudes.png": figure_bytes(figure, "png"),
        "magnitudes.pdf": figure_bytes(figure, "pdf"),
    }
    write_files(directory, files)


def write_files(directory: Path, files: Mapping[str, str | bytes]) -> None:
    """Write named contents into a folder, all or none, and say so. Raises InputError where it cannot be written."""
    from vetter.results import export

    try:
        written = export.write_whole(directory, files)
    except OSError as error:
        raise InputError.single(
            "--out", "", str(directory), f"a folder that can be written ({error.strerror})", "Name another folder."
        ) from error
    click.echo("written: " + ", ".join(str(path) for path in written), err=True)


@main.command()
@system_argument
@click.option("--out", "directory", type=click.Path(path_type=Path), required=True, help="Folder for the section.")
@click.option("--from", "saved", type=click.Path(path_type=Path), metavar="verdicts.json", help="Take these verdicts.")
@click.option("--only", multiple=True, metavar="NAME", help="Write about this scenario only (repeatable).")
@click.option("--figure", "figures", multiple=True, type=int, metavar="N", help="Only this figure, 1-5 (repeatable).")
@click.option("--title", help="Heading of the section.")
@click.option("--journal-table", is_flag=True, help="A deluxetable of the AAS journals instead of booktabs.")
@click.option("--spelling", type=click.Choice(["british", "american"]), default="british", show_default=True)
@run_options
def write(
    system_file: Path,
    directory: Path,
    saved: Path | None,
    only: tuple[str, ...],
    figures: tuple[int, ...],
    title: str | None,
    journal_table: bool,
    spelling: str,
    seed: int,
    quiet: bool,
    grid: str | None,
) -> None:
    """Write the section of the paper: words as LaTeX, Markdown and HTML, table, references and figures."""
    from vetter import evaluate as run
    from vetter import read_system
    from vetter.evaluation import prepare
    from vetter.results.export import to_json
    from vetter.results.prose.saved import read_verdicts
    from vetter.results.prose.section import TITLE
    from vetter.results.writing import Wishes, check, section_files

    system = read_system(system_file)
    check_folder(directory)
    context, observations = prepare(system, grid)
    wishes = Wishes(only, figures, title or TITLE, journal_table, spelling)
    if saved is not None:
        verdicts = read_verdicts(saved, system.name, observations)
    else:
        check(known_scenarios(), wishes)
        verdicts = run(system, None, seed, progress=None if quiet else say_progress, grid=grid)
        say_progress("")
    files = section_files(context, observations, verdicts, wishes)
    write_files(directory, {**files, "verdicts.json": to_json(verdicts)})


def known_scenarios() -> tuple[str, ...]:
    """Return the names of the scenarios that an evaluation runs by default."""
    from vetter.scenarios.base import registered

    return tuple(registered())


@main.command()
@click.option(
    "--star",
    "stars",
    multiple=True,
    required=True,
    metavar="TEFF,LOGG,RADIUS[,FEH]",
    help="K, log10 of cm/s2, solar radii, dex (repeatable; the light is summed).",
)
@click.option("--distance-pc", type=float, required=True)
@click.option("--ebv", "ebv_mag", type=float, default=0.0, show_default=True, help="E(B-V), mag.")
@click.option("--r-v", type=float, default=3.1, show_default=True)
@click.option("--band", "bands", multiple=True, help="Band identifier (repeatable; all by default).")
@click.option("--window", "windows", multiple=True, metavar="LO-HI", help="Wavelength window in nm (repeatable).")
@grid_option
@json_option
def light(
    stars: tuple[str, ...],
    distance_pc: float,
    ebv_mag: float,
    r_v: float,
    bands: tuple[str, ...],
    windows: tuple[str, ...],
    grid: str | None,
    as_json: bool,
) -> None:
    """Magnitudes of each star and of their sum, and light ratios to the first star in windows."""
    from vetter.light.report import light_report, render_light

    found = light_report(
        [numbers("--star", text, ",", (3, 4)) for text in stars],
        distance_pc,
        ebv_mag,
        r_v,
        bands,
        [numbers("--window", text, "-", (2, 2)) for text in windows],
        grid=grid,
    )
    emit(found, render_light(found), as_json)


def numbers(option: str, text: str, separator: str, allowed: tuple[int, int]) -> tuple[float, ...]:
    """Return the numbers of an option such as 5777,4.44,1. Raises InputError when they are not numbers."""
    try:
        values = tuple(float(part) for part in text.split(separator))
    except ValueError:
        values = ()
    if not allowed[0] <= len(values) <= allowed[1]:
        counts = " or ".join(str(n) for n in sorted(set(allowed)))
        raise InputError.single("command line", option, text, f"{counts} numbers separated by '{separator}'")
    return values


@main.command()
@click.argument("kind")
@click.option("--mass", "mass_msun", type=float, required=True, help="Solar masses.")
@click.option("--life-fraction", type=float, default=0.5, show_default=True, help="Age / life of burning.")
@click.option("--feh", type=float, default=0.0, show_default=True, help="[Fe/H], dex, of a main_sequence star.")
@click.option("--teff", "teff_k", type=float, default=10000.0, show_default=True, help="K, of a white_dwarf.")
@json_option
def star(kind: str, mass_msun: float, life_fraction: float, feh: float, teff_k: float, as_json: bool) -> None:
    """Teff, radius, luminosity, log g and lifetime of a star.

    KIND is main_sequence (burns hydrogen), helium (a stripped star that burns helium) or white_dwarf (cools: its mass
    does not tell its Teff).
    """
    from vetter.stars.report import render_star, star_report

    found = star_report(kind, mass_msun, life_fraction, feh, teff_k)
    emit(found, render_star(found), as_json)


@main.command()
@click.option("--figure", type=click.Path(path_type=Path), metavar="FILE", help="Also draw them: .png, .pdf, .svg.")
@json_option
def bands(figure: Path | None, as_json: bool) -> None:
    """List the passbands that are built in: system, type, pivot wavelength, width, zero point, source."""
    from vetter.light.report import bands_report, render_bands

    if figure is not None:
        from vetter.light.bands_figure import write_bands_figure

        write_bands_figure(figure)
        click.echo(f"written: {figure}", err=True)
    found = bands_report()
    emit(found, render_bands(found), as_json)


@main.group(invoke_without_command=True)
@click.option("--errors", is_flag=True, help="Print the error of synthetic magnitudes, per band and Teff, instead.")
@json_option
@click.pass_context
def grids(ctx: click.Context, errors: bool, as_json: bool) -> None:
    """List the atmospheres there are: the shipped ones and, made with `vetter grids add`, your own."""
    if ctx.invoked_subcommand is not None:
        if errors or as_json:
            raise click.UsageError(f"options of {ctx.invoked_subcommand} go behind its name", ctx)
    elif errors:
        from vetter.light.error_report import errors_report, render_errors

        found = errors_report()
        emit(found, render_errors(found), as_json)
    else:
        from vetter.light.user_grids import grids_report, render_grids

        found = grids_report()
        emit(found, render_grids(found), as_json)


@grids.command("add")
@click.argument("folder", metavar="DIR", type=click.Path(path_type=Path))
@click.option("--name", help="Its name for --grid; that of the folder by default.")
@json_option
def add_to_grids(folder: Path, name: str | None, as_json: bool) -> None:
    """Make a table of your own collection of model atmospheres, kept beside the shipped one.

    DIR holds catalog.fits (INDEX, FILENAME) or index.csv (file, teff_k, logg, feh); see the README.
    """
    from vetter.light.user_grids import add_grid, render_grids

    record = add_grid(folder, name)
    emit(record, render_grids([record]), as_json)


@main.command()
@click.argument("name", required=False)
@json_option
def scenarios(name: str | None, as_json: bool) -> None:
    """List the explanations, or show what one assumes: its parameters, priors, walls and light."""
    from vetter.scenarios.report import render_scenario, render_scenarios, scenario_report, scenarios_report

    found = scenarios_report() if name is None else scenario_report(name)
    emit(found, render_scenarios(found) if name is None else render_scenario(found), as_json)
