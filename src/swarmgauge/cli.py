"""The command line: what each command takes, and which package does it. Heavy parts are loaded on use."""

import argparse
import json
import os
import sys
from collections.abc import Iterable, Sequence
from pathlib import Path
from typing import TYPE_CHECKING, Any

from . import __version__
from .gas.errors import InputError

if TYPE_CHECKING:
    from .campaign import RunFile
    from .gas.columns.request import Question
    from .gauge.comparing import Comparison

DONE, FAILED, BAD_INPUT, MISSED, INTERRUPTED = 0, 1, 2, 3, 130


def build_parser() -> argparse.ArgumentParser:
    """The parser of all commands; `command.run` is the function that does it."""
    parser = argparse.ArgumentParser(
        prog="swarmgauge",
        description="Electron swarms in gases: coefficients, distributions and their errors from cross sections.",
        epilog="Exit status: 0 done, 1 failed, 2 bad input, 3 finished but a target was missed or a check found an "
        "error, 130 interrupted.",
    )
    parser.add_argument("--version", action="version", version=f"swarmgauge {__version__}")
    commands = parser.add_subparsers(title="commands", metavar="COMMAND", required=True)

    sets = commands.add_parser("sets", help="list the cross-section sets that come with the program")
    sets.add_argument("--json", action="store_true", help="print JSON")
    sets.set_defaults(run=run_sets)

    check = commands.add_parser("check", help="look for what cannot be right in cross-section sets")
    check.add_argument("sets", metavar="SET", nargs="+", help="name of a shipped set, or path of a set file")
    check.add_argument("--E-over-N-Td", metavar="TD", type=_above_zero, help="also list the energies probed there")
    check.add_argument("--out", metavar="DIR", type=Path, help="draw a figure of every set into this folder")
    check.add_argument("--json", action="store_true", help="print JSON")
    check.set_defaults(run=run_check)

    columns = commands.add_parser("import", help="take cross sections from columns of numbers into a set file")
    columns.add_argument("file", metavar="FILE", help="text file with rows of numbers")
    columns.add_argument("--to", metavar="SET.toml", type=Path, required=True, help="set file to begin or to add to")
    columns.add_argument("--energy", metavar="WORD", nargs="+", default=[], help="its column and unit, as 1 unit=eV")
    columns.add_argument(
        "--column",
        metavar="WORD",
        nargs="+",
        action="append",
        default=[],
        help="a column and its process, as 2 id=v1 kind=excitation threshold_eV=0.29 unit=1e-16cm2 beyond=zero; repeat",
    )
    columns.add_argument("--each", metavar="WORD", nargs="+", default=[], help="what holds for every --column")
    columns.add_argument("--set", metavar="WORD", nargs="+", default=[], dest="top", help="of a new set, as formula=O2")
    columns.add_argument("--lines", metavar="FIRST-LAST", help="where in the file the rows are (default: all lines)")
    columns.add_argument("--decimal-comma", action="store_true", help="a comma is the sign before decimals")
    columns.set_defaults(run=run_import)

    run = commands.add_parser("run", help="compute all points of a run file")
    run.add_argument("runfile", metavar="RUNFILE", help="path of a run file, or the name of a shipped one")
    run.add_argument("--out", metavar="DIR", type=Path, help="results folder (default: beside the run file)")
    run.add_argument("--workers", metavar="N", type=_count, help="threads (default: the cores this process may use)")
    run.add_argument("--max-minutes", metavar="M", type=_above_zero, help="wall clock for the whole campaign")
    run.add_argument("--preview", action="store_true", help="two-term values of all points, in seconds")
    run.add_argument("--dry-run", action="store_true", help="list the points and stop; nothing is written")
    run.add_argument("--quiet", action="store_true", help="print nothing but faults")
    run.add_argument("--json", action="store_true", help="print JSON instead of the table")
    run.set_defaults(run=run_run)

    compare = commands.add_parser("compare", help="hold results against measured data")
    compare.add_argument("folder", metavar="DIR", type=Path, help="results folder of a run")
    compare.add_argument(
        "--measured", metavar="FILE", type=Path, nargs="+", default=[], help="data (default: those of the run file)"
    )
    compare.add_argument("--json", action="store_true", help="print JSON")
    compare.set_defaults(run=run_compare)
    return parser


def run_sets(arguments: argparse.Namespace) -> int:
    """List the shipped sets."""
    from .campaign.listing import sets_json, sets_table

    _print([json.dumps(sets_json(), indent=1)] if arguments.json else sets_table())
    return DONE


def run_check(arguments: argparse.Namespace) -> int:
    """Audit sets; draw them where a folder is given."""
    from .gauge.checking import check, checked_json, checked_lines

    checked = check(arguments.sets, arguments.E_over_N_Td)
    _print([json.dumps(checked_json(checked), indent=1)] if arguments.json else checked_lines(checked))
    if arguments.out:
        from .report import draw_set

        paths = [path for one in checked for path in draw_set(one, arguments.out)]
        _print([] if arguments.json else [f"drawn: {path}" for path in paths])
    return MISSED if any(one.wrong for one in checked) else DONE


def run_import(arguments: argparse.Namespace) -> int:
    """Import columns; ask at a terminal what they leave open."""
    from .campaign.findings import counted
    from .gas.audit.audit import check_set
    from .gas.columns.imported import import_file
    from .gas.columns.request import request_of

    done = import_file(
        arguments.file,
        request_of(arguments.energy, arguments.each, arguments.column, arguments.top),
        arguments.to,
        lines=arguments.lines,
        decimal_comma=arguments.decimal_comma,
        ask=_ask if sys.stdin.isatty() else None,
    )
    _print(
        [
            f"{arguments.to}: {', '.join(done.new)} written, {done.rows} rows",
            f"check: {counted(check_set(done.gas))} (swarmgauge check {arguments.to})",
        ]
    )
    return DONE


def run_run(arguments: argparse.Namespace) -> int:
    """Run a campaign, preview it, or list its points."""
    from .campaign import load_run_file
    from .campaign.locate import locate
    from .campaign.summary import points_json, points_table

    path, folder = locate(arguments.runfile)
    run_file = load_run_file(path)
    folder = arguments.out or folder
    if not arguments.dry_run:
        return (_preview if arguments.preview else _compute)(run_file, folder, arguments)
    if not arguments.quiet:
        _print(
            [json.dumps(points_json(run_file, folder), indent=1)] if arguments.json else points_table(run_file, folder)
        )
    return DONE


def run_compare(arguments: argparse.Namespace) -> int:
    """Compare a results folder with measured data."""
    from .gauge.comparing import comparison_json, comparison_lines

    comparison = _compare_and_draw(arguments.folder, arguments.measured)
    if arguments.json:
        _print([json.dumps(comparison_json(comparison), indent=1)])
    else:
        _print([*comparison_lines(comparison), f"{comparison.folder}"])
    return DONE


def main(argv: Sequence[str] | None = None) -> int:
    """Do what the arguments say (those of the process where None); return the exit status."""
    for stream in (sys.stdout, sys.stderr):
        if hasattr(stream, "reconfigure"):
            stream.reconfigure(errors="replace")  # a title may hold letters that the terminal lacks
    arguments = build_parser().parse_args(argv)
    try:
        return arguments.run(arguments)
    except InputError as error:
        return _fail(str(error), BAD_INPUT)
    except KeyboardInterrupt:
        return _fail("interrupted before anything was computed", INTERRUPTED)
    except BrokenPipeError:
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())  # or closing it would fail once more
        return FAILED
    except OSError as error:
        where = f"{error.filename}: " if error.filename else ""
        return _fail(f"{where}{error.strerror or error}. Points already finished are kept.", FAILED)
    except MemoryError:
        return _fail("out of memory. Use fewer --workers, or split the run file.", FAILED)


def _compute(run_file: "RunFile", folder: Path, arguments: argparse.Namespace) -> int:
    from .campaign import run_campaign
    from .campaign.findings import any_error
    from .campaign.messages import closing, opening
    from .campaign.progress import Bars
    from .campaign.summary import outcome_json
    from .gauge.comparing import comparison_json, comparison_lines

    shown = not (arguments.quiet or arguments.json)
    if shown:
        _print(opening(run_file, folder, arguments.max_minutes))
    with Bars(shown) as bars:
        outcome = run_campaign(
            run_file,
            folder,
            workers=arguments.workers,
            max_minutes=arguments.max_minutes,
            on_start=bars.start,
            on_progress=bars.progress,
            on_finished=bars.finished,
        )
    if outcome.points and not outcome.interrupted:
        from .report import draw_figures

        draw_figures(outcome.folder)
    comparison = None
    if outcome.points and not outcome.interrupted and run_file.measured is not None:
        comparison = _compare_and_draw(outcome.folder)
    sensitivity = None
    if run_file.sensitivity and not outcome.interrupted:
        from .gauge.sensitivity import run_sensitivity, sensitivity_json, sensitivity_lines
        from .report import draw_sensitivity

        sensitivity = run_sensitivity(run_file, folder, workers=arguments.workers)
        draw_sensitivity(sensitivity)
    if shown:
        further = list(comparison_lines(comparison)) if comparison else []
        further += sensitivity_lines(sensitivity) if sensitivity else []
        _print(closing(run_file, outcome, further))
    elif arguments.json:
        found: dict[str, Any] = {"comparison": comparison_json(comparison)} if comparison else {}
        if sensitivity:
            found["sensitivity"] = sensitivity_json(sensitivity)
        _print([json.dumps({**outcome_json(outcome), **found}, indent=1)])
    if outcome.interrupted:
        return INTERRUPTED
    return MISSED if outcome.missed or any_error(run_file.gases) else DONE


def _compare_and_draw(folder: Path, files: Sequence[Path] = ()) -> "Comparison":
    from .gauge.comparing import compare_folder
    from .report import draw_comparison

    comparison = compare_folder(folder, files)
    draw_comparison(comparison)
    return comparison


def _preview(run_file: "RunFile", folder: Path, arguments: argparse.Namespace) -> int:
    from .campaign.preview import preview_json, preview_lines, run_preview

    preview = run_preview(run_file, folder, workers=arguments.workers)
    if arguments.json:
        _print([json.dumps(preview_json(preview), indent=1)])
    elif not arguments.quiet:
        _print(preview_lines(preview))
    return DONE


def _ask(question: "Question", trouble: str) -> str:
    if trouble:
        print(trouble, file=sys.stderr)
    try:
        return input(f"{question.text}? ")
    except EOFError as error:
        raise InputError("no answer was given, so nothing was written.") from error


def _print(lines: Iterable[str]) -> None:
    for line in lines:
        print(line, flush=True)


def _fail(message: str, status: int) -> int:
    for line in message.splitlines():
        print(f"swarmgauge: {line}", file=sys.stderr)
    return status


def _count(text: str) -> int:
    number = int(text)
    if number < 1:
        raise ValueError
    return number


def _above_zero(text: str) -> float:
    number = float(text)
    if not 0.0 < number < float("inf"):
        raise ValueError
    return number
