"""The command line: the only place that prints, exits, or catches the package's exceptions.

Results go to standard output, progress and messages to standard error. Exit status: 0 clean or only warnings,
1 findings of severity error, 2 wrong input, 3 no placement; 130 interrupted. Stages are imported when a
command needs them, so that help is shown at once.
"""

from __future__ import annotations

import gc
import os
import signal
import sys
from collections.abc import Callable, Mapping, Sequence
from datetime import date
from functools import partial
from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

from layoutgen.errors import InfeasibleError, LayoutgenError, WrongInputError
from layoutgen.origin import Fault, Location
from layoutgen.terminal import print_table, print_tables
from layoutgen.wording import FINDING_HEADS, counts, finding_rows, many, summary

if TYPE_CHECKING:
    from layoutgen.checks import Finding, NotChecked
    from layoutgen.writers import Result

__all__ = ["cli", "main", "status_of"]

CLEAN, FINDINGS, WRONG_INPUT, INTERRUPTED, CUT_OFF = 0, 1, 2, 130, 141
_NEW_OBJECTS = 100_000
_ARTWORK_SUFFIXES = (".gds", ".oas", ".dxf")
_HELP = {"help_option_names": ["-h", "--help"], "max_content_width": 100}


def main() -> None:
    """Run the command line and exit; no fault of a user ends in a traceback."""
    signal.signal(signal.SIGTERM, lambda *_: sys.exit(128 + signal.SIGTERM))
    os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")  # threads only get in each other's way: small matrices
    gc.set_threshold(_NEW_OBJECTS, 20, 20)  # a run makes many lasting objects: looking less often saves 4 %
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


_no_correction = click.option(
    "--no-correction", is_flag=True, help="Leave lengths as the budgets alone give them."
)


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
@click.option(
    "--for",
    "receivers",
    metavar="LIST",
    default="all",
    show_default=True,
    shell_complete=lambda context, parameter, typed: _receivers_like(typed),
    help="Whose packages to write, with commas: pcb-designer, board-house, mask-house, assembly, test, "
    "reviewer; or all, or none.",
)
@click.option("--prove", is_flag=True, help="Read every file back and compare it with the model.")
@_no_correction
@_verbosity
def draw(
    circuit: Path,
    out: Path | None,
    repeatable: bool,
    dpi: int,
    receivers: str,
    prove: bool,
    no_correction: bool,
    quiet: bool,
    verbose: bool,
) -> int:
    """Size, place, draw, check and write the artwork of CIRCUIT.

    Exit status: 1 findings of severity error (the files are written), 2 wrong input, 3 no placement.
    """
    from layoutgen.delivery import encoded
    from layoutgen.writers import Job, file_names, load_libraries, older_packages, prepare_folder, write_files

    folder = out if out is not None else Path("out", circuit.stem)
    chosen = _receivers(receivers)
    prepare_folder(folder, (*file_names(circuit.stem), *(f"{name}/README.txt" for name in chosen)))
    result = _run(circuit, quiet, correction=not no_correction, meanwhile=load_libraries)
    job = Job(stem=circuit.stem, dpi=dpi, repeatable=repeatable)
    files = encoded(result, job, chosen)
    write_files(folder, files)
    if not quiet:
        click.echo(f"open {folder / 'report.html'} for the picture, the tables and the findings", err=True)
        click.echo(summary(result))
        print_table("Findings", FINDING_HEADS, finding_rows(result.findings, verbose))
        for path in (path for path in files if "/" not in path):
            click.echo(f"wrote {folder / path}")
        for name in chosen:
            count = sum(path.startswith(f"{name}/") for path in files)
            click.echo(f"wrote {folder / name} ({many(count, 'file')})")
    if old := older_packages(folder, files):
        click.echo(
            f"of an earlier run, not of this drawing: {', '.join(old)} in {folder} (see --for)", err=True
        )
    if verbose:
        _print_seconds(result)
    proved = not prove or _proved(result, files, quiet, verbose)
    return FINDINGS if result.count("error") or not proved else CLEAN


def _receivers(text: str) -> tuple[str, ...]:
    """Return the receivers asked for; their writers are imported only if there are any."""
    if text.strip() == "none":
        return ()
    from layoutgen.writers.packages import receivers_from

    return receivers_from(text)


def _receivers_like(typed: str) -> list[str]:
    """Return what a list of receivers that is being typed in a shell may become."""
    from layoutgen.writers.packages import RECEIVERS

    before, comma, last = typed.rpartition(",")
    names = (
        [name for name in RECEIVERS if name not in before.split(",")]
        if comma
        else [*RECEIVERS, "all", "none"]
    )
    return [f"{before}{comma}{name}" for name in names if name.startswith(last)]


def _proved(result: Result, files: dict[str, bytes], quiet: bool, verbose: bool) -> bool:
    """Read all files back and print what was found; return whether they hold the model."""
    from layoutgen.writers.proof import proof_rows, prove

    proof = prove(result, files)
    rows = [row for row in proof_rows(proof) if verbose or row[0] != "ok"]
    if not quiet:
        print_table("Proof", ("verdict", "file", "reader", "what", "measured", "limit"), rows)
        click.echo(f"{len(proof.checks)} read-back checks, {len(proof.failures)} failed")
        for item in proof.not_proved:
            click.echo(f"not proved: {item.file}: {item.reason}")
    return proof.passed


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
            print_table(table.title, table.heads, table.rows)
    if verbose:
        for note in sized.notes:
            click.echo(f"note: {note}", err=True)
    return CLEAN


@cli.command()
@click.argument("circuit", metavar="CIRCUIT|ARTWORK", type=click.Path(path_type=Path))
@click.option("--json", "as_json", is_flag=True, help="Print JSON with the keys of report.json.")
@click.option("--junit", type=click.Path(path_type=Path), help="Also write the findings as JUnit XML.")
@click.option("--rules", help="For artwork: the rule file, or the name of a shipped one.")
@click.option("--layers", type=click.Path(path_type=Path), help="For artwork: which layer is which (TOML).")
@click.option("--unit", type=click.Choice(("mm", "in", "um")), help="For a DXF file that states no unit.")
@_verbosity
def check(
    circuit: Path,
    as_json: bool,
    junit: Path | None,
    rules: str | None,
    layers: Path | None,
    unit: str | None,
    quiet: bool,
    verbose: bool,
) -> int:
    """Print the findings of CIRCUIT as it would be drawn, or of ARTWORK (.gds, .oas, .dxf) by a rule file."""
    from layoutgen.writers.report_json import findings_json

    if circuit.suffix.lower() in _ARTWORK_SUFFIXES:
        findings, not_checked = _foreign(circuit, rules, layers, unit)
        head = f"{circuit.name}: {counts(findings)}; {len(not_checked)} not checked"
    else:
        _refuse_artwork_options(circuit, rules, layers, unit)
        result = _run(circuit, quiet)
        findings, not_checked, head = result.findings, result.checks.not_checked, summary(result)
    if junit is not None:
        _write_junit(junit, findings, not_checked)
    if as_json:
        click.echo(findings_json(findings, not_checked))
    elif not quiet:
        click.echo(head)
        print_table("Findings", FINDING_HEADS, finding_rows(findings, notes=True))
        rows = [(item.rule, item.reason) for item in not_checked]
        print_table("Not checked", ("not checked", "reason"), rows)
    return FINDINGS if any(finding.counts for finding in findings) else CLEAN


def _foreign(
    path: Path, rules: str | None, layers: Path | None, unit: str | None
) -> tuple[tuple[Finding, ...], tuple[NotChecked, ...]]:
    """Judge artwork of any origin by a rule file."""
    from layoutgen.foreign import check_foreign, read_artwork
    from layoutgen.reading import read_rules

    if rules is None:
        raise _wrong(path, "an artwork file without rules", "--rules with a rule file or its shipped name")
    found = check_foreign(read_artwork(path, layers, unit), read_rules(rules), date.today())
    return found.findings, found.not_checked


def _refuse_artwork_options(path: Path, rules: str | None, layers: Path | None, unit: str | None) -> None:
    """Refuse options that a circuit file makes no use of: it names its own rules."""
    given = {"--rules": rules, "--layers": layers, "--unit": unit}
    named = [option for option, value in given.items() if value is not None]
    if named:
        raise _wrong(path, f"{named[0]} with a circuit file", "it with artwork only (.gds, .oas, .dxf)")


def _write_junit(path: Path, findings: Sequence[Finding], not_checked: Sequence[NotChecked]) -> None:
    """Write the findings for a build server."""
    from layoutgen.checks import CheckResult
    from layoutgen.writers import prepare_folder, write_files
    from layoutgen.writers.junit import junit as junit_xml

    prepare_folder(path.parent)
    result = CheckResult(findings=tuple(findings), not_checked=tuple(not_checked))
    write_files(path.parent, {path.name: junit_xml(result)})


@cli.command()
@click.argument("first", metavar="A", type=click.Path(path_type=Path))
@click.argument("second", metavar="B", type=click.Path(path_type=Path))
@click.option("--picture", type=click.Path(path_type=Path), help="Write an overlay of both as PNG.")
@click.option("-q", "--quiet", is_flag=True, help="Say nothing but errors.")
def compare(first: Path, second: Path, picture: Path | None, quiet: bool) -> int:
    """Print what differs between artworks A and B (.gds, .oas, .dxf); exit status 0 equal, 1 differs."""
    from layoutgen.compare import compare as compare_artworks
    from layoutgen.compare import overlay
    from layoutgen.foreign import read_artwork
    from layoutgen.writers import prepare_folder, write_files

    a, b = read_artwork(first), read_artwork(second)
    comparison = compare_artworks(a, b)
    if picture is not None:
        prepare_folder(picture.parent)
        write_files(picture.parent, {picture.name: overlay(comparison, a, b)})
    if not quiet:
        click.echo(comparison.summary())
        print_table("Changes", ("severity", "layer", "kind", "net", "what"), comparison.rows())
    return CLEAN if comparison.equal else FINDINGS


@cli.command()
@click.argument("circuit", type=click.Path(path_type=Path))
@click.option("-n", "--samples", type=click.IntRange(1, 1_000_000), default=1000, show_default=True)
@click.option("--seed", type=click.IntRange(0), default=1, show_default=True)
@click.option("--limit", "limits", multiple=True, help='Such as "change <= 0.05"; repeatable.')
@click.option("--processes", type=click.IntRange(1, 64), default=1, show_default=True)
@click.option("--scheduler", help="Address of a dask.distributed scheduler to spread the samples over.")
@click.option("--out", type=click.Path(path_type=Path), help="Folder for tolerance.json, .csv and .png.")
@_verbosity
def tolerance(
    circuit: Path,
    samples: int,
    seed: int,
    limits: tuple[str, ...],
    processes: int,
    scheduler: str | None,
    out: Path | None,
    quiet: bool,
    verbose: bool,
) -> int:
    """Print what the limits of [tolerance] do to CIRCUIT's response: yield, worst contributors, corners."""
    from layoutgen.response import tolerance as spread
    from layoutgen.writers import prepare_folder
    from layoutgen.writers.response_tables import tolerance_tables
    from layoutgen.writers.tolerance_files import tolerance_files

    if out is not None:
        prepare_folder(out)
    result = _run(circuit, quiet)
    found = spread(
        result.artwork, samples=samples, seed=seed, limits=limits, processes=processes, scheduler=scheduler
    )
    if not quiet:
        click.echo(f"yield {100.0 * found.yield_share:.1f} % of {found.samples} samples, seed {found.seed}")
        print_tables(tolerance_tables(found))
    if out is not None:
        _write_into(out, tolerance_files(found, result.circuit.file.design.title), quiet)
    if verbose:
        _print_seconds(result)
    return CLEAN


@cli.command()
@click.argument("circuit", type=click.Path(path_type=Path))
@click.option("--out", type=click.Path(path_type=Path), help="Folder for the files; default out/STEM.")
@click.option("--port", type=click.IntRange(0, 65535), default=0, help="Port here; 0 takes a free one.")
def watch(circuit: Path, out: Path | None, port: int) -> int:
    """Draw CIRCUIT again whenever it is saved, and serve its page on this machine until interrupted."""
    from layoutgen.pipeline import run
    from layoutgen.watch import watch as watch_circuit

    signal.signal(signal.SIGTERM, signal.SIG_IGN)  # the server takes it itself, and ends
    folder = out if out is not None else Path("out", circuit.stem)
    say = partial(click.echo, err=True)
    watch_circuit(circuit, folder, port, draw=partial(run, today=date.today()), tell=say)
    return CLEAN


@cli.command()
@click.argument("circuit", type=click.Path(path_type=Path))
@click.option("--out", type=click.Path(path_type=Path), help="Folder for Touchstone files and the plots.")
@_verbosity
def response(circuit: Path, out: Path | None, quiet: bool, verbose: bool) -> int:
    """Print the S-parameters of CIRCUIT as wanted and as drawn, and what transistors and feeds see."""
    from layoutgen.writers import Job, prepare_folder, response_files
    from layoutgen.writers.response_tables import response_tables

    if out is not None:
        prepare_folder(out)
    result = _run(circuit, quiet)
    if result.response is None:
        raise _wrong(
            circuit, "a circuit without RF ports", "one with at least one port of kind rf, or terminations"
        )
    if not quiet:
        print_tables(response_tables(result.response))
    if out is not None:
        _write_into(out, response_files(result, Job(stem=circuit.stem)), quiet)
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


def _run(
    circuit: Path, quiet: bool, *, correction: bool = True, meanwhile: Callable[[], None] = lambda: None
) -> Result:
    """Run all stages, with progress on a terminal."""
    from layoutgen.pipeline import run
    from layoutgen.terminal import Progress

    with Progress(sys.stderr, enabled=sys.stderr.isatty() and not quiet) as progress:
        return run(circuit, tell=progress, correction=correction, today=date.today(), meanwhile=meanwhile)


def _write_into(folder: Path, files: Mapping[str, bytes], quiet: bool) -> None:
    """Write files and say so."""
    from layoutgen.writers import write_files

    write_files(folder, files)
    for name in files if not quiet else ():
        click.echo(f"wrote {folder / name}")


def _wrong(path: Path, found: str, allowed: str) -> WrongInputError:
    return WrongInputError([Fault(Location(str(path), 0), "", found, allowed)])


def _print_seconds(result: Result) -> None:
    for stage, seconds in result.seconds.items():
        click.echo(f"{stage}: {seconds:.3f} s", err=True)
