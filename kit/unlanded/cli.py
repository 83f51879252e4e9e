"""The command line. A refusal is printed as one sentence, and the command exits with 2."""

from __future__ import annotations

import datetime
import os
import shutil
import sys
from collections.abc import Callable
from functools import wraps
from pathlib import Path
from typing import Any, TypeVar

import click

from . import __version__
from .errors import Mistake, Refused

CAUTION = (
    "A calculation never proves a conductor dead. Prove dead at the point of work with an "
    "instrument proved before and after; local codes and licensed practice govern."
)
# The systems here are small: threads within LAPACK would only wait for each other. It is read when
# numpy is first imported, here and in the notebooks' own processes.
os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")
FILE = click.Path(path_type=Path)
Command = TypeVar("Command", bound=Callable[..., None])


def refusing(command: Command) -> Command:
    """Print what the command refuses, a sentence a line, instead of a traceback; exit with 2."""

    @wraps(command)
    def wrapped(*args: Any, **kwargs: Any) -> None:
        try:
            command(*args, **kwargs)
        except Refused as refusal:
            leave(refusal.mistakes)
        except BrokenPipeError:
            raise  # the reader of our output has gone, such as `head`: click leaves quietly
        except OSError as error:
            leave([Mistake(str(error.filename or "file"), "cannot be read or written",
                           error.strerror or str(error))])

    return wrapped  # type: ignore[return-value]


def leave(mistakes: Any) -> None:
    """Print the mistakes to the error stream and exit with 2."""
    from .report.words import printable

    for mistake in mistakes:
        click.echo(printable(str(mistake)), err=True)
    sys.exit(2)


@click.group(context_settings={"help_option_names": ["-h", "--help"]}, epilog=CAUTION)
@click.version_option(__version__)
def main() -> None:
    """What instruments should read on conductors that nothing feeds, and what margin is left."""
    for stream in (sys.stdout, sys.stderr):
        # A terminal without Ω or µ gets a mark in their place, not a traceback.
        if callable(reconfigure := getattr(stream, "reconfigure", None)):
            reconfigure(errors="replace")


@main.command()
@click.argument("case", type=FILE)
@refusing
def check(case: Path) -> None:
    """List every mistake in a case file, with its line."""
    from .case.loading import check_case

    if mistakes := check_case(case):
        leave(mistakes)
    click.echo(f"{case}: no mistake found.")


@main.command()
@click.argument("case", type=FILE)
@click.option("--csv", "csv_file", type=FILE, help="Write the sheet to this file as CSV.")
@click.option("--field", is_flag=True, help="Make the sheet to take to site, CASE-field.pdf, and "
              "CASE-field.csv to fill in.")
@refusing
def sheet(case: Path, csv_file: Path | None, field: bool) -> None:
    """Print what every instrument should read on every pair, if all is well."""
    from .case.loading import load_case
    from .report.case_memo import investigate
    from .report.expected import sheet_tables
    from .report.sheet_table import sheet_table
    from .report.tables import csv_text, plain

    if field:
        write_field_sheet(case)
        return
    readings = investigate(load_case(case)).sheet
    if csv_file is not None:
        write_new(csv_file, csv_text(sheet_table(readings)).encode("utf-8-sig"))
        click.echo(f"Wrote {csv_file}")
        return
    click.echo("\n\n".join(plain(table, _width()) for table in sheet_tables(readings)))
    click.echo(f"\n{CAUTION}")


@main.command()
@click.argument("case", type=FILE)
@click.option("--into", type=FILE, help="Folder to make; CASE-memo beside you when not given.")
@click.option("--template", type=FILE, help="A firm's own Word file (.docx) for its styles.")
@click.option("--paper", type=click.Choice(["a4", "us-letter"]), help="Default: as the units.")
@click.option("--date", type=click.DateTime(["%Y-%m-%d"]), help="That the memo bears.")
@click.option("--prepared-by", default="", help="Name for the title block.")
@click.option("--checked-by", default="", help="Name for the title block.")
@click.option("--overwrite", is_flag=True, help="Replace an older memo in that folder.")
@refusing
def memo(case: Path, into: Path | None, date: datetime.datetime | None, overwrite: bool,
         **look: Any) -> None:
    """Make the memo of a case: Word, PDF, figures, tables and results in one folder."""
    from .case.loading import load_case
    from .report.case_memo import case_contents, investigate
    from .report.folder import write_folder

    target = into or Path(f"{case.stem}-memo")
    day = date.date() if date else datetime.date.today()
    contents = case_contents(investigate(load_case(case)), date=day, **look)
    files = write_folder(target, contents, overwrite=overwrite)
    click.echo(f"The memo is in {target.absolute()}")
    for file in files:
        click.echo(f"  {file.relative_to(target.absolute())}")
    click.echo(CAUTION)


@main.command()
@click.argument("case", type=FILE)
@refusing
def margin(case: Path) -> None:
    """Print what stands behind the device of a case, its margin, and what would trip it."""
    from .case.loading import load_case
    from .report.case_memo import investigate
    from .report.margin import margin_part
    from .report.terminal import part_text

    part = margin_part(investigate(load_case(case)))
    if part is None:
        raise Refused(str(case), "has no residual-current device",
                      hint='write [device] with rated = "30 mA"')
    click.echo(part_text(part, _width()))
    click.echo(f"\n{CAUTION}")


@main.command()
@click.argument("register", type=FILE)
@click.option("--into", type=FILE, help="Folder to make; REGISTER-screen when not given.")
@click.option("--voltage", default="230 V", show_default=True, help="Line to neutral.")
@click.option("--frequency", default="50 Hz", show_default=True)
@click.option("--regroup", help="Board whose circuits to regroup; a small register's only one.")
@click.option("--date", type=click.DateTime(["%Y-%m-%d"]), help="That the memo bears.")
@click.option("--overwrite", is_flag=True, help="Replace an older memo in that folder.")
@refusing
def screen(register: Path, into: Path | None, voltage: str, frequency: str, regroup: str | None,
           date: datetime.datetime | None, overwrite: bool) -> None:
    """Rank the devices of a register (CSV) by margin: table, memo and results in one folder."""
    from tqdm import tqdm

    from .case.register import read_register
    from .case.screening import screen_register
    from .report.folder import write_folder
    from .report.screen_memo import ranking_table, screen_contents, screen_summary
    from .report.tables import plain
    from .study.supply import Supply
    from .units import si

    supply = Supply(si(voltage, "V", place="--voltage"), si(frequency, "Hz", place="--frequency"))
    listed = read_register(register)
    with tqdm(total=len(listed.devices), unit=" devices", disable=None) as bar:
        found = screen_register(listed, register.parent, supply, progress=bar.update,
                                regroup_board=regroup)
    command = f'unlanded screen "{register.name}" --voltage "{voltage}" --frequency "{frequency}"'
    command += f' --regroup "{regroup}"' if regroup else ""
    target = into or Path(f"{register.stem}-screen")
    day = date.date() if date else datetime.date.today()
    contents = screen_contents(found, register.read_bytes(), date=day, command=command)
    write_folder(target, contents, overwrite=overwrite)
    click.echo(screen_summary(found))
    click.echo(plain(ranking_table(found, 10), _width()))
    click.echo(f"The memo and the table of all devices are in {target.absolute()}\n{CAUTION}")


def _width() -> int:
    """Of the terminal, in letters; 100 where there is none."""
    return max(60, shutil.get_terminal_size((100, 24)).columns)


@main.command()
@click.argument("folder", type=FILE)
@click.option("--no-open", is_flag=True, help="Only copy; do not start JupyterLab.")
@refusing
def workbook(folder: Path, no_open: bool) -> None:
    """Copy the notebooks and demo sites to a folder, and open JupyterLab there."""
    from .panels.notebooks import copy_workbook, lab_command, lab_environment

    made, kept = copy_workbook(folder)
    click.echo(f"Copied {len(made)} files to {folder.absolute()}"
               + (f"; {len(kept)} were there already and are as they were" if kept else ""))
    click.echo(CAUTION)
    if not no_open:
        import subprocess

        click.echo("JupyterLab opens in the browser; stop it here with Ctrl-C twice.")
        done = subprocess.run(lab_command(folder), env=lab_environment(), check=False)
        sys.exit(done.returncode)


@main.command()
@click.argument("folder", type=FILE)
@click.option("--refresh", is_flag=True, help="Store the new output in the notebooks.")
@refusing
def rerun(folder: Path, refresh: bool) -> None:
    """Run every notebook of a folder without a browser, and say which numbers have moved."""
    from tqdm import tqdm

    from .panels import notebooks

    do = notebooks.refresh if refresh else notebooks.compare
    found = notebooks.notebooks_in(folder)
    each = tqdm(notebooks.each(do, found), total=len(found), unit=" notebooks", disable=None)
    moved = [m for made in each for m in made]
    for line in moved:
        click.echo(str(line))
    click.echo(f"{len(found)} notebooks run, {len(moved)} lines moved.")
    if moved and not refresh:
        sys.exit(1)


@main.command()
@click.argument("case", type=FILE)
@click.option("--readings", type=FILE, help="A CSV of readings, such as the field sheet's.")
@refusing
def causes(case: Path, readings: Path | None) -> None:
    """Say what the case's readings mean, and what to measure next."""
    from .case.loading import load_case
    from .case.observed import with_readings
    from .report.case_memo import investigate
    from .report.causes import causes_text

    loaded = load_case(case)
    investigation = investigate(with_readings(loaded, readings) if readings else loaded)
    click.echo(causes_text(investigation, _width()))
    click.echo(f"\n{CAUTION}")


def write_field_sheet(case: Path) -> None:
    """Make the PDF to take to site and the CSV to fill in, beside the reader."""
    from .case.loading import load_case
    from .report.case_memo import investigate
    from .report.field_sheet import field_csv, field_memo
    from .report.memo_pdf import pdf_bytes
    from .report.tables import csv_text

    investigation = investigate(load_case(case))
    made = field_memo(investigation, date=datetime.date.today())
    paper = "us-letter" if investigation.customary else "a4"
    files = {Path(f"{case.stem}-field.pdf"): pdf_bytes(made, {}, paper=paper),
             Path(f"{case.stem}-field.csv"):
             csv_text(field_csv(investigation)).encode("utf-8-sig")}
    if taken := [path for path in files if path.exists()]:
        raise there_already(taken[0])
    for path, data in files.items():
        write_new(path, data)
        click.echo(f"Wrote {path}")


def there_already(path: Path) -> Refused:
    """The refusal of a file that would be written over."""
    return Refused(str(path), "is there already, and nothing is written over",
                   hint="choose another name")


def write_new(path: Path, data: bytes) -> None:
    """Write a file that is not there yet; whole, or not at all."""
    try:
        file = path.open("xb")
    except FileExistsError:
        raise there_already(path) from None
    try:
        with file:
            file.write(data)
    except BaseException:
        path.unlink(missing_ok=True)
        raise


if __name__ == "__main__":
    main()
