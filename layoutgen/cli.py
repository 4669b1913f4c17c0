"""The command line: the only place that prints, exits, or catches the package's exceptions.

Results go to standard output, progress and messages to standard error. Exit status: 0 clean or only warnings,
1 findings of severity error, 2 wrong input, 3 no placement; 130 interrupted. Stages are imported when a
command needs them, so that help is shown at once.
"""

from __future__ import annotations

import os
import signal
import sys
from collections.abc import Callable, Sequence
from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

from layoutgen.errors import InfeasibleError, LayoutgenError, WrongInputError
from layoutgen.origin import Fault, Location

if TYPE_CHECKING:
    from layoutgen.checks import Finding
    from layoutgen.writers import Result

__all__ = ["cli", "main", "status_of"]

CLEAN, FINDINGS, WRONG_INPUT, INTERRUPTED, CUT_OFF = 0, 1, 2, 130, 141
_ARTWORK_SUFFIXES = (".gds", ".oas", ".dxf")
_HELP = {"help_option_names": ["-h", "--help"], "max_content_width": 100}


def main() -> None:
    """Run the command line and exit; no fault of a user ends in a traceback."""
    signal.signal(signal.SIGTERM, lambda *_: sys.exit(128 + signal.SIGTERM))
    sys.exit(status_of(sys.argv[1:]))


def status_of(arguments: Sequence[str]) -> int:
    """Run a command and return the exit status."""
    try:
        status = cli.main(args=list(arguments), prog_name="layoutgen", standalone_mode=False)
        sys.stdout.flush()
    except click.ClickException as error:
        error.show()
        return error.exit_code
    except LayoutgenError as error:
        _show(error)
        return error.exit_status
    except (KeyboardInterrupt, click.Abort):
        click.echo("interrupted; the files are as they were", err=True)
        return INTERRUPTED
    except BrokenPipeError:
        # whoever read the output has gone; keep the interpreter from complaining when it flushes
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return CUT_OFF
    return status if isinstance(status, int) else CLEAN


def _show(error: LayoutgenError) -> None:
    """Print an error, one line for each fault."""
    click.echo(str(error), err=True)
    if isinstance(error, InfeasibleError):
        click.echo("no placement; nothing was written", err=True)


@click.group(context_settings=_HELP, no_args_is_help=True)
@click.version_option(package_name="layoutgen", message="layoutgen %(version)s")
def cli() -> None:
    """Turn a finished microwave schematic into microstrip board artwork.

    Start with: layoutgen draw CIRCUIT
    """


def _verbosity(command: Callable[..., Any]) -> Callable[..., Any]:
    """Add the two options that all commands share."""
    quiet = click.option("-q", "--quiet", is_flag=True, help="Say nothing but errors.")
    verbose = click.option("-v", "--verbose", is_flag=True, help="Also show notes and the time spent.")
    return quiet(verbose(command))


@cli.command()
@click.argument("circuit", type=click.Path(path_type=Path))
@click.option("--out", type=click.Path(path_type=Path), help="Folder for the files; default out/STEM.")
@click.option("--repeatable", is_flag=True, help="Leave out times, so that equal input gives equal bytes.")
@click.option(
    "--dpi",
    type=click.IntRange(30, 600),
    default=150,
    show_default=True,
    help="Resolution of the PNG, whose longer side is ten inches.",
)
@_verbosity
def draw(circuit: Path, out: Path | None, repeatable: bool, dpi: int, quiet: bool, verbose: bool) -> int:
    """Size, place, draw, check and write the artwork of CIRCUIT.

    Exit status: 1 findings of severity error (the files are written), 2 wrong input, 3 no placement.
    """
    from layoutgen.writers import Job, file_names, prepare_folder, write

    folder = out if out is not None else Path("out", circuit.stem)
    prepare_folder(folder, file_names(circuit.stem))
    result = _run(circuit, quiet)
    paths = write(result, folder, Job(stem=circuit.stem, dpi=dpi, repeatable=repeatable))
    if not quiet:
        click.echo(f"open {folder / 'report.html'} for the picture, the tables and the findings", err=True)
        click.echo(_summary(result))
        _print_findings(result.findings, verbose)
        for path in paths:
            click.echo(f"wrote {path}")
    if verbose:
        _print_seconds(result)
    return FINDINGS if result.count("error") else CLEAN


@cli.command()
@click.argument("circuit", type=click.Path(path_type=Path))
@click.option("--json", "as_json", is_flag=True, help="Print JSON with the keys of report.json.")
@_verbosity
def size(circuit: Path, as_json: bool, quiet: bool, verbose: bool) -> int:
    """Print widths, lengths and length budgets of CIRCUIT; write nothing."""
    from layoutgen.circuit import build_circuit
    from layoutgen.reading import read_inputs
    from layoutgen.size_report import size_json, size_tables
    from layoutgen.sizing import size_circuit

    inputs = read_inputs(circuit)
    sized = size_circuit(build_circuit(inputs.circuit, inputs.rules))
    if as_json:
        click.echo(size_json(sized))
        return CLEAN
    tables = size_tables(sized)
    if not quiet:
        click.echo(
            "drawn straight, before placement: bends and free lines are known to `draw` only", err=True
        )
        for table in tables:
            _print_table(table.title, table.heads, table.rows)
    if verbose:
        for note in sized.notes:
            click.echo(f"note: {note}", err=True)
    return CLEAN


@cli.command()
@click.argument("circuit", type=click.Path(path_type=Path))
@click.option("--json", "as_json", is_flag=True, help="Print JSON with the keys of report.json.")
@_verbosity
def check(circuit: Path, as_json: bool, quiet: bool, verbose: bool) -> int:
    """Print the findings of CIRCUIT as it would be drawn; write nothing."""
    from layoutgen.writers import findings_report

    _refuse_artwork(circuit)
    result = _run(circuit, quiet)
    if as_json:
        click.echo(findings_report(result))
    elif not quiet:
        click.echo(_summary(result))
        _print_findings(result.findings, notes=True)
        rows = [(item.rule, item.reason) for item in result.checks.not_checked]
        _print_table("Not checked", ("not checked", "reason"), rows)
    if verbose:
        _print_seconds(result)
    return FINDINGS if result.count("error") else CLEAN


@cli.command()
@click.argument("circuit", type=click.Path(path_type=Path))
@click.option("--out", type=click.Path(path_type=Path), help="Folder for Touchstone files and the plots.")
@_verbosity
def response(circuit: Path, out: Path | None, quiet: bool, verbose: bool) -> int:
    """Print the S-parameters of CIRCUIT as wanted and as drawn."""
    from layoutgen.writers import TRACE_HEADS, Job, prepare_folder, response_files, trace_values, write_files

    if out is not None:
        prepare_folder(out)
    result = _run(circuit, quiet)
    if result.response is None:
        raise _wrong(
            circuit, "a circuit without RF ports", "one with at least one port of kind rf, or terminations"
        )
    if out is not None:
        files = response_files(result, Job(stem=circuit.stem))
        write_files(out, files)
    if not quiet:
        _print_table("Response", TRACE_HEADS, trace_values(result.response))
        for name in files if out is not None else ():
            click.echo(f"wrote {Path(str(out), name)}")
    if verbose:
        _print_seconds(result)
    return CLEAN


@cli.command()
def schema() -> int:
    """Print the JSON Schema of the circuit file and of the rule file."""
    import json

    from layoutgen.reading import schema as schema_of_both

    click.echo(json.dumps(schema_of_both(), indent=1, ensure_ascii=False))
    return CLEAN


def _run(circuit: Path, quiet: bool) -> Result:
    """Run all stages, with progress on a terminal."""
    from layoutgen.pipeline import run
    from layoutgen.terminal import Progress

    with Progress(sys.stderr, enabled=sys.stderr.isatty() and not quiet) as progress:
        return run(circuit, tell=progress)


def _refuse_artwork(path: Path) -> None:
    """Refuse artwork files: they cannot be checked yet."""
    if path.suffix.lower() in _ARTWORK_SUFFIXES:
        raise _wrong(path, "an artwork file", "a circuit file (checking other artwork is not available yet)")


def _wrong(path: Path, found: str, allowed: str) -> WrongInputError:
    return WrongInputError([Fault(Location(str(path), 0), "", found, allowed)])


def _summary(result: Result) -> str:
    """Return one line: the board and how many findings there are."""
    placement, artwork = result.placement, result.artwork
    counts = ", ".join(_many(result.count(kind), kind) for kind in ("error", "warning", "note"))
    return (
        f"{placement.width / 1e6:g} x {placement.height / 1e6:g} mm, {_many(len(placement.lines), 'line')}, "
        f"{_many(len(placement.parts), 'part')}, {_many(len(artwork.vias), 'via')}; {counts}; "
        f"{len(result.checks.not_checked)} not checked"
    )


def _many(count: int, noun: str) -> str:
    return f"{count} {noun}" if count == 1 else f"{count} {noun}s"


def _print_findings(findings: Sequence[Finding], notes: bool) -> None:
    """Print the findings as a table, numbered as in the report."""
    shown = [(n, f) for n, f in enumerate(findings, start=1) if notes or f.severity != "note"]
    rows = [
        (str(n), f.severity if f.waived is None else "waived", f.rule, ", ".join(f.items) or "-", f.text)
        for n, f in shown
    ]
    _print_table("Findings", ("no", "severity", "rule", "items", "what"), rows)


def _print_seconds(result: Result) -> None:
    for stage, seconds in result.seconds.items():
        click.echo(f"{stage}: {seconds:.3f} s", err=True)


def _print_table(title: str, heads: Sequence[str], rows: Sequence[Sequence[str]]) -> None:
    """Print a table: with lines and colours on a terminal, plain when piped; nothing when it has no rows."""
    from layoutgen.terminal import plain_table, rich_table

    if rows and sys.stdout.isatty():
        rich_table(title, heads, rows, sys.stdout)
    elif rows:
        click.echo(plain_table(heads, rows) + "\n")
