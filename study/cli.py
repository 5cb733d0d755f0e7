"""The command line: the only place that prints or sets an exit status.

Heavy libraries are imported inside the commands, so that ``--help`` answers at once.
"""

from __future__ import annotations

import argparse
import io
import os
import sys

TYPE_CHECKING = False  # the name tells the type checker; importing it from typing would slow --help
if TYPE_CHECKING:
    from collections.abc import Callable, Sequence
    from typing import TextIO

    from study.issues import Issue
    from study.report.content import StudyOutcome

EXIT_WITHIN, EXIT_EXCEEDS, EXIT_UNUSABLE, EXIT_UNASSESSED = 0, 1, 2, 3

_EPILOG = """exit status: 0 nothing exceeds its limit; 1 something exceeds, or a mode has no solution;
2 the workbook cannot be used; 3 only items that could not be assessed remain.

Results support, and do not replace, class approval, flag rules, local codes and the judgement of a
qualified engineer."""


def main(arguments: Sequence[str] | None = None) -> int:
    """Run one command and return its exit status.

    Parameters
    ----------
    arguments : sequence of str, optional
        The words behind the program's name; those of the process where not given.

    Returns
    -------
    int
        0, 1, 2 or 3 as the epilog of ``--help`` says.
    """
    options = _parser().parse_args(arguments)
    for stream in (sys.stdout, sys.stderr):
        if isinstance(stream, io.TextIOWrapper):
            # a name that the terminal has no letters for is no reason to stop
            stream.reconfigure(errors="replace")
    # the matrices are small: a second thread of the linear algebra library costs more than it gives
    os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")
    command: Callable[[argparse.Namespace], int] = options.command
    from study.issues import StudyError, WorkbookError

    try:
        return command(options)
    except WorkbookError as error:
        _print_issues(options.book, error.issues)
        return EXIT_UNUSABLE
    except StudyError as error:
        _say(f"study: {error}", file=sys.stderr)
        return EXIT_UNUSABLE
    except KeyboardInterrupt:
        print("study: stopped; no file was changed by what had not been finished", file=sys.stderr)
        return EXIT_UNUSABLE


def _parser() -> argparse.ArgumentParser:
    parser = argparse.ArgumentParser(
        prog="study",
        description="Electrical studies of a ship's power plant from one Excel workbook.",
        epilog=_EPILOG,
        formatter_class=argparse.RawDescriptionHelpFormatter,
    )
    commands = parser.add_subparsers(required=True, metavar="command")
    _add_run(commands)
    _add_check(commands)
    _add_new(commands)
    _add_compare(commands)
    return parser


def _add_run(commands: argparse._SubParsersAction[argparse.ArgumentParser]) -> None:
    run = commands.add_parser("run", help="do the whole study and write the results", epilog=_EPILOG)
    run.add_argument("book", type=_path, help="the workbook (.xlsx or .xlsm)")
    run.add_argument(
        "--out", type=_path, metavar="FOLDER", help="leave the workbook untouched; write everything there"
    )
    run.add_argument("--quiet", action="store_true", help="print nothing unless something is wrong")
    run.add_argument(
        "--networks", action="store_true", help="also write each mode's network as pandapower JSON"
    )
    run.set_defaults(command=_run)


def _add_check(commands: argparse._SubParsersAction[argparse.ArgumentParser]) -> None:
    check = commands.add_parser("check", help="read the workbook and list everything wrong with it")
    check.add_argument("book", type=_path, help="the workbook (.xlsx or .xlsm)")
    check.set_defaults(command=_check)


def _add_new(commands: argparse._SubParsersAction[argparse.ArgumentParser]) -> None:
    new = commands.add_parser("new", help="write a blank workbook, or a copy of a demonstration vessel")
    new.add_argument("book", type=_path, help="the file to write; it must not exist yet")
    new.add_argument("--demo", metavar="NAME", help="workboat, service-vessel or large-vessel")
    new.set_defaults(command=_new)


def _add_compare(commands: argparse._SubParsersAction[argparse.ArgumentParser]) -> None:
    compare = commands.add_parser(
        "compare", help="hold two modes of one workbook, or two workbooks, side by side"
    )
    compare.add_argument("book", type=_path, help="the workbook")
    compare.add_argument("other", type=_path, nargs="?", help="another revision of it")
    compare.add_argument("--modes", nargs=2, metavar=("MODE", "MODE"), help="two modes of the workbook")
    compare.set_defaults(command=_compare)


def _path(text: str) -> object:
    from pathlib import Path

    return Path(text)


def _run(options: argparse.Namespace) -> int:
    from study.pipeline import run_study, write_results

    progress = _no_progress if options.quiet else _show_progress
    outcome = run_study(options.book, progress=progress)
    written = write_results(
        outcome, options.book, out=options.out, networks=options.networks, progress=progress
    )
    if not options.quiet:
        _end_progress()
        _print_summary(outcome)
        for note in written.notes:
            _say(note)
        for path in written.paths:
            _say(f"wrote {path}")
    return _exit_status(outcome)


def _check(options: argparse.Namespace) -> int:
    from study.pipeline import check_study

    plant, issues = check_study(options.book)
    _print_issues(options.book, issues)
    if plant is None:
        return EXIT_UNUSABLE
    for text in plant.not_read:
        _say(f"not read: {text}")
    _say(f"{options.book}: can be used; {len(plant.assumptions)} typical values stand in for blanks")
    return EXIT_WITHIN


def _new(options: argparse.Namespace) -> int:
    from study.issues import PackageError
    from study.pipeline import write_new

    if options.book.exists():
        raise PackageError(f"{options.book} is there already; give the name of a file that is not")
    write_new(options.book, options.demo)
    _say(f"wrote {options.book}")
    return EXIT_WITHIN


def _compare(options: argparse.Namespace) -> int:
    from study.issues import StudyError
    from study.pipeline import compare_modes, compare_workbooks

    if bool(options.modes) == bool(options.other):
        raise StudyError("compare takes either another workbook, or --modes with two mode names")
    if options.modes:
        _say(compare_modes(options.book, *options.modes))
    else:
        _say(compare_workbooks(options.book, options.other))
    return EXIT_WITHIN


def _exit_status(outcome: StudyOutcome) -> int:
    found = {verdict.status for verdict in outcome.verdicts}
    if "exceeds" in found:
        return EXIT_EXCEEDS
    return EXIT_UNASSESSED if "not assessed" in found else EXIT_WITHIN


def _print_summary(outcome: StudyOutcome) -> None:
    from study.pipeline import summary_text

    _say(summary_text(outcome))


def _print_issues(book: object, issues: Sequence[Issue]) -> None:
    faults = [issue for issue in issues if issue.severity == "fault"]
    others = [issue for issue in issues if issue.severity != "fault"]
    if faults:
        count = f"{len(faults)} fault" + ("s" if len(faults) != 1 else "")
        _say(f"study: {book} cannot be used: {count}", file=sys.stderr)
    for issue in faults:
        _say(f"  {issue}", file=sys.stderr)
    for issue in others:
        _say(f"{issue.severity}: {issue}")


def _say(text: str, *, file: TextIO | None = None) -> None:
    """Print a text whose lines may hold names from a workbook, without what would steer the terminal."""
    from study.issues import one_line

    for line in text.split("\n"):
        print(one_line(line), file=file)


def _show_progress(text: str) -> None:
    if sys.stderr.isatty():
        print(f"\r\x1b[K{text} ...", end="", file=sys.stderr, flush=True)


def _end_progress() -> None:
    if sys.stderr.isatty():
        print("\r\x1b[K", end="", file=sys.stderr, flush=True)


def _no_progress(_text: str) -> None:
    return
