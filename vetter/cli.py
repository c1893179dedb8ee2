"""The command line: parse, call the API, print. Heavy modules are imported inside each command."""

from __future__ import annotations

import json
import os
import shutil
import sys
from collections.abc import Callable
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
@click.option("--seed", default=0, show_default=True, help="Same seed and input, same output.")
@click.option("--quiet", is_flag=True, help="Print no progress.")
def evaluate(
    system_file: Path, as_json: bool, directory: Path | None, scenarios: tuple[str, ...], seed: int, quiet: bool
) -> None:
    """Fit every explanation to everything that was measured and print the table of verdicts."""
    from vetter import evaluate as run
    from vetter import read_system
    from vetter.results.table import render

    system = read_system(system_file)
    if directory is not None:
        check_folder(directory)
    verdicts = run(system, scenarios or None, seed, progress=None if quiet else say_progress)
    say_progress("")
    if directory is not None:
        write_results(system, verdicts, directory)
    emit(verdicts.to_dict(), "" if as_json else render(verdicts, shutil.get_terminal_size((120, 40)).columns), as_json)


def say_progress(words: str) -> None:
    """Show on a terminal what is being worked on; an empty text clears the line."""
    if sys.stderr.isatty():
        click.echo(f"\r\033[K{words}", err=True, nl=False)


def check_folder(directory: Path) -> None:
    """Raise InputError before any work when the results could not be written there."""
    if directory.exists() and not directory.is_dir():
        raise InputError.single("--out", "", str(directory), "a folder, but it is a file", "Name another folder.")


def write_results(system: System, verdicts: Verdicts, directory: Path) -> None:
    """Write verdicts.json, .csv, .ecsv and the figure, all or none."""
    from vetter.evaluation import prepare
    from vetter.observations.photometry import PhotometryObservation
    from vetter.results import export, figures

    context, observations = prepare(system)
    photometry = next(o for o in observations if isinstance(o, PhotometryObservation))
    figure = figures.magnitudes_figure(verdicts, context, photometry)
    files: dict[str, str | bytes] = {
        "verdicts.json": export.to_json(verdicts),
        "verdicts.csv": export.to_csv(verdicts),
        "verdicts.ecsv": export.to_ecsv(verdicts),
        "magnitudes.png": figures.figure_bytes(figure, "png"),
        "magnitudes.pdf": figures.figure_bytes(figure, "pdf"),
    }
    try:
        written = export.write_whole(directory, files)
    except OSError as error:
        raise InputError.single(
            "--out", "", str(directory), f"a folder that can be written ({error.strerror})", "Name another folder."
        ) from error
    click.echo("written: " + ", ".join(str(path) for path in written), err=True)


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
@json_option
def light(
    stars: tuple[str, ...],
    distance_pc: float,
    ebv_mag: float,
    r_v: float,
    bands: tuple[str, ...],
    windows: tuple[str, ...],
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
@click.option("--life-fraction", type=float, default=0.5, show_default=True, help="Age / main-sequence life.")
@click.option("--feh", type=float, default=0.0, show_default=True, help="[Fe/H], dex.")
@json_option
def star(kind: str, mass_msun: float, life_fraction: float, feh: float, as_json: bool) -> None:
    """Teff, radius, luminosity, log g and lifetime of a star. KIND is main_sequence or white_dwarf."""
    from vetter.stars.report import render_star, star_report

    found = star_report(kind, mass_msun, life_fraction, feh)
    emit(found, render_star(found), as_json)


@main.command()
@json_option
def bands(as_json: bool) -> None:
    """List the passbands that are built in."""
    from vetter.light.report import bands_report, render_bands

    found = bands_report()
    emit(found, render_bands(found), as_json)
