"""Events in time against limits: voltage, frequency, motors that must run up, contactors that must hold."""

from __future__ import annotations

import math
from collections.abc import Iterator
from typing import Final

from study.checks.limits import Limits
from study.checks.verdict import Sense, Status, Verdict, make_verdict, worst
from study.model.plant import Plant
from study.results.dips import Cure, DipsResult, MotorTrace, SimulatedCase

SUBJECT: Final = "dips"
JUDGED_KINDS: Final = frozenset(
    {"motor start", "load step", "set trip", "load rejection", "transformer energising"}
)
"""Events of service; faults, faulty settings and the build-up of voltage have no transient limits."""
_RUN_UP_PERCENT: Final = 90.0
"""Cage motors run above it at any load that they can drive for long."""
_NOT_TRIED: Final = "Run one set more, or change how the motor is started."
_CURE_START: Final = (
    "Run one set more before it starts, or start it with less current; simulate it as an Event."
)


def judge_dips(plant: Plant, result: DipsResult, limits: Limits) -> tuple[Verdict, ...]:
    """Judge every simulated case.

    Voltages are those of the board of the largest set, in per cent of its nominal voltage; limits of
    transients are not applied while a fault lasts, nor to a wrong setting or a build-up of voltage.

    Parameters
    ----------
    plant : Plant
        For the rated frequency.
    result : DipsResult
        The simulated cases.
    limits : Limits
        Transient limits.

    Returns
    -------
    tuple of Verdict
        Subject ``dips``, one row for each case and quantity, equipment being the name of the case;
        and the quick estimate of starts, equipment being the motor.
    """
    starts = _starts(plant, result, limits)
    cases = (
        verdict
        for case in result.cases
        for verdict in _Case(
            case, plant.project.f_rated_hz, limits, remedy=_remedy(plant, result, case.case, limits)
        ).verdicts()
    )
    return (*starts, *cases)


def cure_status(plant: Plant, cure: Cure, limits: Limits) -> Status:
    """Return the worst verdict of a case simulated with a cure.

    Parameters
    ----------
    plant : Plant
        For the rated frequency.
    cure : Cure
        The case with one thing changed.
    limits : Limits
        Transient limits.

    Returns
    -------
    str
        A status word.
    """
    judged = worst(tuple(_Case(cure.simulated, plant.project.f_rated_hz, limits).verdicts()))
    return judged.status if judged is not None else "within"


def _remedy(plant: Plant, result: DipsResult, case: str, limits: Limits) -> str:
    tried = [cure for cure in result.cures if cure.case == case]
    if not tried:
        return _NOT_TRIED
    held = [c.change for c in tried if cure_status(plant, c, limits) in ("within", "close")]
    if not held:
        return "None of the cures tried by simulation is enough by itself; see the table of cures."
    return f"Simulated again, each of these is enough by itself: {'; '.join(held)}."


def _starts(plant: Plant, result: DipsResult, limits: Limits) -> Iterator[Verdict]:
    """Judge the quick estimate of the motors in use: all that dip too far, and the deepest of each mode."""
    cells = {load.name: load.cell for load in plant.loads}
    for mode in result.estimates:
        demand = plant.mode(mode.mode).demand
        used = [k for k, name in enumerate(mode.loads) if name in demand and demand[name].in_use > 0.0]
        deepest = sorted(used, key=lambda k: -float(mode.dip_pu[k]))
        judged = [
            make_verdict(
                mode=mode.mode,
                subject=SUBJECT,
                equipment=mode.loads[k],
                quantity=f"dip of {mode.set_boards[k]} when it starts, quick estimate",
                value=100.0 * float(mode.dip_pu[k]),
                limit=limits.number("transient_low"),
                unit="%",
                close_margin=limits.fraction("close_margin"),
                basis=limits.basis("transient_low"),
                data_tolerance=limits.fraction("load_data_tolerance"),
                cell=cells[mode.loads[k]],
                remedy=_CURE_START,
            )
            for k in deepest
        ]
        yield from (v for n, v in enumerate(judged) if n == 0 or v.status == "exceeds")


class _Case:
    def __init__(self, case: SimulatedCase, f_rated_hz: float, limits: Limits, *, remedy: str = "") -> None:
        self.case, self.f_rated_hz, self.limits, self.remedy = case, f_rated_hz, limits, remedy
        self.kinds = set(case.kinds)

    def verdicts(self) -> Iterator[Verdict]:
        """Yield the verdicts of the case."""
        if not self.case.simulated:
            yield self._one("simulation of the case", float("nan"), 1.0, "-", basis=self.case.reason)
            return
        if self.case.collapsed:
            yield self._one(
                "boards left dead by the event", 1.0, 0.0, "-", basis="SOLAS II-1/41.5, from memory"
            )
        if self.kinds & JUDGED_KINDS:
            yield from self._voltage()
            yield from self._frequency()
            yield from self._contactors()
        for motor in self.case.motors:
            yield from self._motor(motor)

    def _voltage(self) -> Iterator[Verdict]:
        u = self.case.voltage
        yield self._limit("voltage below nominal", 100.0 * (1.0 - u.least), "transient_low", "%")
        yield self._limit("voltage above nominal", 100.0 * (u.largest - 1.0), "transient_high", "%")
        yield self._limit("time until the voltage is back", u.recovery_s, "recovery_time", "s")

    def _frequency(self) -> Iterator[Verdict]:
        f = self.case.frequency
        off = max(self.f_rated_hz - f.least, f.largest - self.f_rated_hz)
        yield self._limit("frequency off rated", 100.0 * off / self.f_rated_hz, "transient_frequency", "%")
        yield self._limit("time until the frequency is back", f.recovery_s, "frequency_recovery", "s")

    def _contactors(self) -> Iterator[Verdict]:
        """Judge the worst contactor where any would open; those of a dead board are no further matter."""
        if self.case.collapsed or not self.case.drop_outs:
            return
        least = min(self.case.drop_outs, key=lambda d: d.u_least_pu - d.drop_out_pu)
        yield self._one(
            f"voltage at {least.load} against its contactor's drop-out",
            100.0 * least.u_least_pu,
            100.0 * least.drop_out_pu,
            "%",
            sense="at least",
            basis="IEC 60947-4-1: contactors hold down to 75 % at most, from memory",
        )

    def _motor(self, motor: MotorTrace) -> Iterator[Verdict]:
        if self.case.collapsed:
            return
        yield self._one(
            f"speed that {motor.load} reaches, of synchronous",
            100.0 * float(motor.speed_pu[-1]),
            _RUN_UP_PERCENT,
            "%",
            sense="at least",
            basis="a motor must run up, common practice, no source",
        )
        if motor.relay and not math.isnan(motor.relay_quick):
            yield self._one(
                f"heating of {motor.relay} when {motor.load} has run up, of its tripping",
                100.0 * motor.relay_quick,
                100.0,
                "%",
                basis=f"IEC 60947-4-1, class {motor.relay_class}, quickest relay of the class, from memory",
            )

    def _limit(self, quantity: str, value: float, key: str, unit: str) -> Verdict:
        return self._one(quantity, value, self.limits.number(key), unit, basis=self.limits.basis(key))

    def _one(
        self,
        quantity: str,
        value: float,
        limit: float,
        unit: str,
        *,
        basis: str,
        sense: Sense = "at most",
    ) -> Verdict:
        return make_verdict(
            mode=self.case.mode,
            subject=SUBJECT,
            equipment=self.case.case,
            quantity=quantity,
            value=value,
            limit=limit,
            unit=unit,
            sense=sense,
            close_margin=self.limits.fraction("close_margin"),
            basis=basis,
            cell=self.case.cells[0] if self.case.cells else "",
            remedy=self.remedy,
        )
