"""Runs the rooms in order: workbook, network, analyses, checks, report. No formula, no cell address."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

from study.issues import ChangedFileError, Issue, PackageError, StudyError

if TYPE_CHECKING:
    import pandas as pd

    from study.analyses.balance import BalanceOptions
    from study.analyses.cable_protection import CableOptions
    from study.analyses.dips_options import DipOptions
    from study.analyses.grading_options import GradingOptions
    from study.analyses.sharing_options import SharingOptions
    from study.checks.limits import Limits
    from study.model.plant import Plant
    from study.network.network import Network
    from study.report.content import StudyOutcome
    from study.results.short_circuit import ModeShortCircuit
    from study.workbook.package import Package

Progress = Callable[[str], None]
MOST_NAMED = 5
DEMOS = ("workboat", "service-vessel", "large-vessel")


@dataclass(frozen=True, slots=True, kw_only=True)
class Written:
    """Files that a run has written, and what the user should know about them."""

    paths: tuple[Path, ...]
    notes: tuple[str, ...]


def run_study(book: Path | str, progress: Progress | None = None) -> StudyOutcome:
    """Read a workbook and do the whole study; nothing is written.

    Parameters
    ----------
    book : path
        An .xlsx or .xlsm file.
    progress : callable, optional
        Is told in a few words what is being done.

    Returns
    -------
    StudyOutcome
        Plant, results and verdicts.

    Raises
    ------
    WorkbookError
        The workbook cannot be used; holds every fault.
    PackageError
        The file cannot be opened.
    """
    from study.workbook import read_plant

    _tell(progress, f"reading {Path(book).name}")
    return study_plant(read_plant(book), progress)


def study_plant(plant: Plant, progress: Progress | None = None) -> StudyOutcome:
    """Do the whole study of a plant that has been read.

    Parameters
    ----------
    plant : Plant
        The plant.
    progress : callable, optional
        Is told in a few words what is being done.

    Returns
    -------
    StudyOutcome
        Plant, results and verdicts.
    """
    from dataclasses import replace

    from study.analyses.balance import load_balance
    from study.analyses.cable_protection import cable_protection
    from study.analyses.dips_cures import try_cures
    from study.analyses.dips_estimate import start_estimates
    from study.analyses.dips_simulation import simulate_cases
    from study.analyses.fault_ratings import fault_ratings
    from study.analyses.generator_protection import generator_protection
    from study.analyses.grading import grading
    from study.analyses.load_flow import load_flow
    from study.analyses.protection_devices import protection_devices
    from study.analyses.regulation import voltage_regulation
    from study.analyses.sharing import sharing_study
    from study.analyses.short_circuit import short_circuit
    from study.checks.dips import judge_dips
    from study.checks.limits import limits_in_force
    from study.network.network import build_network, mode_network
    from study.report.content import StudyOutcome
    from study.report.methods import METHODS
    from study.report.methods_dips import DIPS_METHODS
    from study.report.methods_protection import PROTECTION_METHODS
    from study.results.dips import DipsResult

    limits = limits_in_force(plant.acceptance)
    network = build_network(plant)
    networks = [mode_network(network, mode) for mode in plant.modes]
    _tell(progress, "load balance")
    balance = load_balance(plant, [at.view for at in networks], _balance_options(limits))
    p_kw, q_kvar = balance.demand.p_counted_kw, balance.demand.q_counted_kvar
    _tell(progress, f"load flow of {len(networks)} modes")
    flow = load_flow(
        networks,
        p_kw,
        q_kvar,
        running_kw=balance.demand.p_kw,
        running_kvar=balance.demand.q_kvar,
    )
    _tell(progress, "regulation and sharing")
    regulation = voltage_regulation(plant)
    sharing = sharing_study(networks, p_kw, q_kvar, _sharing_options(limits))
    _tell(progress, "short-circuit currents and fault ratings")
    faults = short_circuit(network, views=[at.view for at in networks])
    ratings = fault_ratings(plant, faults)
    _tell(progress, "grading of protective devices")
    graded = grading(plant, faults, flow, balance, _grading_options(limits), resolve=_resolver(network))
    _tell(progress, "cables and the sets' protection")
    devices = protection_devices(plant)
    cables = cable_protection(plant, devices, flow, faults, _cable_options(limits))
    _tell(progress, "events in time")
    estimates, largest = start_estimates(networks, p_kw, q_kvar, _dip_options(limits))
    cases = simulate_cases(networks, p_kw, q_kvar, _dip_options(limits), progress=progress)
    dips = DipsResult(estimates=estimates, largest=largest, cases=cases)
    failed = {v.equipment for v in judge_dips(plant, dips, limits) if v.status == "exceeds"}
    cures = try_cures(
        networks,
        [case.case for case in cases if case.case in failed],
        p_kw,
        q_kvar,
        _dip_options(limits),
        progress=progress,
    )
    dips = replace(dips, cures=cures)
    outcome = StudyOutcome(
        plant=plant,
        balance=balance,
        load_flow=flow,
        regulation=regulation,
        sharing=sharing,
        short_circuit=faults,
        fault_ratings=ratings,
        grading=graded,
        cables=cables,
        dips=dips,
        set_protection=generator_protection(plant, devices, flow, faults),
        verdicts=(),
        limits=tuple(limits.by_key[key] for key in USED_LIMITS),
        methods=(*METHODS, *PROTECTION_METHODS, *DIPS_METHODS),
        tool_version=tool_version(),
    )
    return _judged(outcome, limits)


USED_LIMITS = (
    "close_margin",
    "voltage_reference",
    "load_data_tolerance",
    "intermittent_diversity",
    "one_set_margin",
    "set_loading",
    "set_loss_loading",
    "one_out_loading",
    "emergency_duration",
    "emergency_start",
    "voltage_low",
    "voltage_high",
    "frequency_deviation",
    "cable_drop",
    "regulation_main",
    "regulation_emergency",
    "speed_variation",
    "kw_sharing_largest",
    "kw_sharing_own",
    "kvar_sharing_largest",
    "kvar_sharing_smallest",
    "cable_loading",
    "transformer_loading",
    "busbar_loading",
    "supply_loading",
    "breaking_rating",
    "earth_fault_standing",
    "earth_fault_detection",
    "grading_margin",
    "fault_clearing",
    "motor_starting_time",
    "cable_overload_trip",
    "steering_overload",
    "reverse_power_least",
    "reverse_power_most",
    "reverse_power_delay",
    "undervoltage_least",
    "undervoltage_most",
    "overvoltage_most",
    "underfrequency_least",
    "overfrequency_most",
    "preferential_least",
    "preferential_most",
    "preferential_delay",
    "set_long_time",
    "set_overload_time",
    "set_short_time",
    "set_differential",
    "transient_low",
    "transient_high",
    "recovery_time",
    "voltage_recovery_band",
    "transient_frequency",
    "frequency_recovery",
    "frequency_recovery_band",
)


def _judged(outcome: StudyOutcome, limits: Limits) -> StudyOutcome:
    from dataclasses import replace

    from study.checks.cables import judge_cables
    from study.checks.capacity import judge_capacity
    from study.checks.dips import cure_status, judge_dips
    from study.checks.discrimination import judge_discrimination
    from study.checks.fault_ratings import judge_fault_ratings
    from study.checks.generator_protection import judge_generator_protection
    from study.checks.loading import judge_loading
    from study.checks.sharing import judge_regulation, judge_sharing
    from study.checks.voltage import judge_voltage

    plant, ratings, graded = outcome.plant, outcome.fault_ratings, outcome.grading
    cables, sets, dips = outcome.cables, outcome.set_protection, outcome.dips
    return replace(
        outcome,
        cure_words=tuple(cure_status(plant, cure, limits) for cure in dips.cures) if dips is not None else (),
        verdicts=(
            *judge_capacity(plant, outcome.balance, limits),
            *judge_loading(plant, outcome.load_flow, limits),
            *judge_voltage(plant, outcome.load_flow, limits),
            *judge_sharing(plant, outcome.sharing, limits),
            *judge_regulation(plant, outcome.regulation, limits),
            *(judge_fault_ratings(plant, ratings, limits) if ratings is not None else ()),
            *(judge_discrimination(plant, graded, limits) if graded is not None else ()),
            *(judge_cables(plant, cables, limits) if cables is not None else ()),
            *(judge_generator_protection(plant, sets, limits) if sets is not None else ()),
            *(judge_dips(plant, dips, limits) if dips is not None else ()),
        ),
    )


def _balance_options(limits: Limits) -> BalanceOptions:
    from study.analyses.balance import BalanceOptions

    return BalanceOptions(
        intermittent_diversity=limits.number("intermittent_diversity"),
        one_set_margin=limits.fraction("one_set_margin"),
        emergency_hours=limits.number("emergency_duration"),
        emergency_basis=limits.basis("emergency_duration"),
        blackout_start_s=limits.number("emergency_start"),
    )


def _cable_options(limits: Limits) -> CableOptions:
    from study.analyses.cable_protection import CableOptions

    return CableOptions(
        drop_limit_pu=limits.fraction("cable_drop"),
        trip_factor=limits.fraction("cable_overload_trip"),
    )


def _dip_options(limits: Limits) -> DipOptions:
    from study.analyses.dips_options import DipOptions

    return DipOptions(
        dip_allowed_pu=limits.fraction("transient_low"),
        rise_allowed_pu=limits.fraction("transient_high"),
        recovery_band_pu=limits.fraction("voltage_recovery_band"),
        frequency_band_pu=limits.fraction("frequency_recovery_band"),
    )


def _resolver(network: Network) -> Callable[[int, tuple[str, ...]], ModeShortCircuit]:
    """Return what solves the short-circuits of a mode with some devices open."""
    from dataclasses import replace

    from study.analyses.short_circuit import short_circuit
    from study.analyses.short_circuit_options import ShortCircuitOptions

    def resolve(number: int, opened: tuple[str, ...]) -> ModeShortCircuit:
        mode = network.plant.modes[number]
        mode = replace(mode, states={**mode.states, **dict.fromkeys(opened, "off")})
        without = replace(network, plant=replace(network.plant, modes=(mode,)))
        return short_circuit(without, ShortCircuitOptions(compare=False)).modes[0]

    return resolve


def _grading_options(limits: Limits) -> GradingOptions:
    from study.analyses.grading_options import GradingOptions

    return GradingOptions(
        margin_s=limits.number("grading_margin"),
        clearing_s=limits.number("fault_clearing"),
        starting_time_s=limits.number("motor_starting_time"),
    )


def _sharing_options(limits: Limits) -> SharingOptions:
    from study.analyses.sharing_options import SharingOptions

    return SharingOptions(
        kw_of_largest=limits.fraction("kw_sharing_largest"),
        kw_of_own=limits.fraction("kw_sharing_own"),
        kvar_of_largest=limits.fraction("kvar_sharing_largest"),
        kvar_of_smallest=limits.fraction("kvar_sharing_smallest"),
        voltage_low=limits.fraction("voltage_low"),
        voltage_high=limits.fraction("voltage_high"),
        frequency=limits.fraction("frequency_deviation"),
    )


def check_study(book: Path | str) -> tuple[Plant | None, tuple[Issue, ...]]:
    """Read and check a workbook, and do nothing else.

    Parameters
    ----------
    book : path
        An .xlsx or .xlsm file.

    Returns
    -------
    plant : Plant or None
        None where there is a fault.
    issues : tuple of Issue
        Everything found, in the order of the sheets.
    """
    from study.issues import WorkbookError
    from study.workbook import check_workbook

    plant, issues = check_workbook(book)
    if plant is not None:
        from study.network.network import build_network

        try:
            build_network(plant)
        except WorkbookError as error:
            return None, (*issues, *error.issues)
    return plant, issues


def write_new(book: Path, demo: str | None) -> None:
    """Write a blank workbook, or a copy of a demonstration vessel.

    Parameters
    ----------
    book : Path
        The file to write.
    demo : str or None
        Name of the demonstration vessel.

    Raises
    ------
    StudyError
        There is no vessel of that name.
    """
    from study.resources import resource_dir
    from study.workbook import write_workbook
    from study.workbook.package import write_atomically

    if book.suffix.lower() != ".xlsx":
        raise StudyError(f"{book.name}: give the new workbook a name that ends in .xlsx")
    if demo is None:
        write_workbook(book)
        return
    if demo not in DEMOS:
        raise StudyError(f"there is no demonstration vessel {demo!r}; the names are {', '.join(DEMOS)}")
    write_atomically(book, (resource_dir("workbooks") / f"{demo}.xlsx").read_bytes())


def write_results(
    outcome: StudyOutcome,
    book: Path | str,
    *,
    out: Path | None = None,
    networks: bool = False,
    progress: Progress | None = None,
) -> Written:
    """Write result sheets into the workbook, and report and JSON beside it; or all of it to a folder.

    Parameters
    ----------
    outcome : StudyOutcome
        The study of that workbook.
    book : path
        The workbook that was read.
    out : Path, optional
        A folder; the workbook itself is then left untouched and a copy is written there.
    networks : bool
        Also write the network of every mode for those who script.
    progress : callable, optional
        Is told in a few words what is being done.

    Returns
    -------
    Written
        Paths and notes.

    Raises
    ------
    PackageError
        A file cannot be written; what stood there before is whole.
    """
    from study.report.catalogue import all_tables
    from study.report.excel import result_workbook
    from study.report.html import report_page
    from study.report.json_out import json_text
    from study.workbook.package import graft_result_sheets, open_package, write_atomically

    book = Path(book)
    folder = _folder(book, out)
    _tell(progress, "writing the result sheets")
    package, tables = open_package(book), all_tables(outcome)
    if outcome.plant.file_digest not in ("", package.digest):
        raise ChangedFileError(
            f"{book.name}: the file was changed while the study ran, nothing was written; run again"
        )
    try:
        data = graft_result_sheets(package.data, result_workbook(outcome, tables))
    except PackageError as error:
        raise PackageError(f"{book.name}: {error}") from error
    _tell(progress, "writing the report")
    texts = {
        f"{book.stem}-report.html": report_page(outcome, tables),
        f"{book.stem}-results.json": json_text(outcome, tables),
    }
    target, notes = _write_book(book, folder / book.name, data, package.digest)
    paths = [target]
    for name, text in texts.items():
        write_atomically(folder / name, text.encode("utf-8"))
        paths.append(folder / name)
    if networks:
        paths += _write_networks(outcome, folder, book.stem)
    return Written(paths=tuple(paths), notes=(*notes, *_note_own_work(package), *_note_formulas(package)))


def _note_own_work(package: Package) -> tuple[str, ...]:
    """Return a note where somebody wrote on the result sheets of the last run, which are replaced."""
    from study.workbook import own_work_on_results

    found = own_work_on_results(package)
    if not found:
        return ()
    more = f" and {len(found) - MOST_NAMED} more" if len(found) > MOST_NAMED else ""
    return (
        f"replaced with the result sheets: {', '.join(found[:MOST_NAMED])}{more}; keep formulas and comments "
        "of your own on sheets of your own, they may refer to result sheets",
    )


def _note_formulas(package: Package) -> tuple[str, ...]:
    """Return a note where formulas of the engineer's read result sheets: their values are of the last run."""
    from study.workbook import sheets_that_show_results

    sheets = sheets_that_show_results(package)
    if not sheets:
        return ()
    return (
        f"formulas on {', '.join(sheets)} read result sheets; they show the new results when the workbook is "
        "next opened in a spreadsheet program",
    )


def _folder(book: Path, out: Path | None) -> Path:
    if out is None:
        return book.parent
    if out.exists() and not out.is_dir():
        raise PackageError(f"{out} is a file; give the name of a folder")
    try:
        out.mkdir(parents=True, exist_ok=True)
    except OSError as error:
        raise PackageError(f"{out}: the folder cannot be made ({error.strerror})") from error
    if out.resolve() == book.resolve().parent:
        raise PackageError(f"{out} is the workbook's own folder; --out leaves the workbook untouched")
    return out


def _write_book(book: Path, target: Path, data: bytes, digest: str) -> tuple[Path, tuple[str, ...]]:
    """Write the workbook; where it cannot be written in place, write a copy beside it and say so."""
    from study.workbook.package import write_atomically

    in_place = target.resolve() == book.resolve()
    try:
        write_atomically(target, data, read_digest=digest if in_place else None)
    except ChangedFileError:
        raise
    except PackageError as error:
        if not in_place:
            raise
        copy = _free_copy(book)
        try:
            write_atomically(copy, data)
        except PackageError:
            raise PackageError(f"{error}; give another folder with --out FOLDER") from error
        return copy, (f"{error}; the result sheets are in {copy.name} instead",)
    return target, ()


def _free_copy(book: Path) -> Path:
    """Return a name beside the workbook that no file has: an earlier copy may hold the engineer's changes."""
    copy, number = book.with_name(f"{book.stem}-with-results{book.suffix}"), 1
    while copy.exists():
        number += 1
        copy = book.with_name(f"{book.stem}-with-results-{number}{book.suffix}")
    return copy


def _write_networks(outcome: StudyOutcome, folder: Path, stem: str) -> list[Path]:
    from study.network.cases import case
    from study.network.network import build_network, mode_network
    from study.network.solver import export_json
    from study.workbook.package import write_atomically

    demand = outcome.balance.demand
    network = build_network(outcome.plant)
    paths = []
    for row, mode in enumerate(outcome.plant.modes):
        one = case(mode_network(network, mode), demand.p_counted_kw[row], demand.q_counted_kvar[row])
        name = "".join(c if c.isalnum() else "-" for c in mode.name.lower())
        path = folder / f"{stem}-network-{row + 1:02d}-{name}.json"
        write_atomically(path, export_json(network, one).encode("utf-8"))
        paths.append(path)
    return paths


def result_frames(outcome: StudyOutcome) -> dict[str, pd.DataFrame]:
    """Return every result table as a DataFrame, for notebooks.

    Parameters
    ----------
    outcome : StudyOutcome
        The study.

    Returns
    -------
    dict of str to pandas.DataFrame
        Keyed and headed like the JSON file; columns of a mode are headed ``(mode, key)``.
    """
    import pandas as pd

    from study.report.catalogue import all_tables

    frames = {}
    for key, table in all_tables(outcome).items():
        headings = [(c.group, c.key) if c.group else c.key for c in table.columns]
        frames[key] = pd.DataFrame(dict(zip(headings, table.values, strict=True)))
    return frames


def summary_text(outcome: StudyOutcome) -> str:
    """Return a short table of verdicts for the terminal: subjects down, modes across."""
    from study.report.comparison import verdict_summary

    return verdict_summary(outcome)


def compare_modes(book: Path, one: str, other: str) -> str:
    """Return two modes of a workbook side by side, as text.

    Raises
    ------
    StudyError
        The workbook has no such mode.
    """
    from study.report.comparison import modes_side_by_side

    outcome = run_study(book)
    for name in (one, other):
        if name not in outcome.modes:
            raise StudyError(f"{book.name} has no mode {name!r}; its modes are {', '.join(outcome.modes)}")
    return modes_side_by_side(outcome, one, other)


def compare_workbooks(book: Path, other: Path) -> str:
    """Return what changed between two revisions of a workbook, inputs and verdicts, as text."""
    from study.report.comparison import revisions_side_by_side

    return revisions_side_by_side(run_study(book), run_study(other))


def tool_version() -> str:
    """Return the version of the installed program."""
    from importlib.metadata import PackageNotFoundError, version

    try:
        return version("vessel-study")
    except PackageNotFoundError:
        return "not installed"


def _tell(progress: Progress | None, text: str) -> None:
    if progress is not None:
        progress(text)
