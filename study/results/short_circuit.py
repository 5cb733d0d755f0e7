"""Result of the short-circuit study: every place, in every mode, by IEC 61363-1 and by IEC 60909.

Places are numbered once for the whole plant (`ShortCircuitResult.places`); arrays [place] hold NaN where a
place is dead in that mode, arrays [place, source] hold 0. Currents are r.m.s. in A at the voltage of the
place unless the name says otherwise: ``peak`` and ``ip`` are instantaneous, ``idc`` is the direct component.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np

from study.results.arrays import BoolArray, FloatArray, IntArray
from study.results.fault_routes import FaultRoutes

PlaceKind = Literal["board", "transformer terminals", "source terminals", "consumer terminals"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Places:
    """Where a fault is studied, tuples and arrays [place]; boards come first, in workbook order.

    ``names`` holds the board or the equipment at whose terminals the fault lies (two ends of a transformer
    with cables are told apart by ``boards``); ``boards`` the board that it belongs to. ``u_nominal_v`` is the
    nominal voltage there.
    """

    names: tuple[str, ...]
    kinds: tuple[PlaceKind, ...]
    boards: tuple[str, ...]
    u_nominal_v: FloatArray


@dataclass(frozen=True, slots=True, kw_only=True)
class FaultSources:
    """What feeds a fault in one case of one mode, tuples and arrays [source].

    ``kinds`` is genset, shore supply, converter supply, synchronous motor, motor, regenerating drive, small
    motors (the motors up to 100 kW of one board as one), or taken over from motors: a last row, in cases with
    motors, for what the lasting sources give more behind a common impedance as motors die away; it is nothing
    at t = 0. ``boards`` is where it stands. ``rated_a`` is its rated current
    at its own voltage, ``initial_a``, ``peak_a`` and ``sustained_a`` what it gives into a fault at its own
    terminals. ``holds`` says in words what it keeps up and why; ``holds_s`` for how long (inf: no end is
    known; 0: nothing is kept). ``sustained_known`` is False where the workbook gives no sustained current
    and a constant field stands in for it. ``preload`` is the load before the fault in per unit of rated.
    """

    names: tuple[str, ...]
    kinds: tuple[str, ...]
    boards: tuple[str, ...]
    island: IntArray
    rated_a: FloatArray
    initial_a: FloatArray
    peak_a: FloatArray
    sustained_a: FloatArray
    sustained_known: BoolArray
    holds: tuple[str, ...]
    holds_s: FloatArray
    preload: FloatArray


@dataclass(frozen=True, slots=True, kw_only=True)
class Exponentials:
    """What each source gives at each place, as exponentials, arrays [place, source].

    ``Iac(t) = (I'' - I') e^(-t/T'') + (I' - Ik) e^(-t/T') + Ik`` r.m.s. and ``idc(t) = dc e^(-t/Tdc)``, both
    0 after ``ends_s`` [source] (a converter that blocks; inf for all else). The fields but the last are those
    of `study.formulas.fault_current.FaultCurrent`. ``sustained_a`` is the duty estimate in the maximum case
    and the reach estimate in the minimum case.
    """

    subtransient_a: FloatArray
    transient_a: FloatArray
    sustained_a: FloatArray
    dc_a: FloatArray
    t_sub_s: FloatArray
    t_trans_s: FloatArray
    t_dc_s: FloatArray
    ends_s: FloatArray


@dataclass(frozen=True, slots=True, kw_only=True)
class BranchEnds:
    """Every closed branch at every live place where it ends, [end]: what of the fault comes through it.

    ``place`` [end] is where the branch ends and the fault lies; ``share`` [end, source] is the part (0..1) of
    each source's current at that place that arrives through this branch; the rest of it comes from the other
    branches. ``through_half_a`` is Iac(T/2) and ``through_ip_a`` the peak that arrive through the branch,
    ``rest_half_a`` and ``rest_ip_a`` those of all else: what the branch's own device at this end must break
    and make is the larger. ``determined`` is False for a tie in a closed ring of ties without impedance: the
    whole current is then taken as coming through it.
    """

    place: IntArray
    branches: tuple[str, ...]
    kinds: tuple[str, ...]
    far_ends: tuple[str, ...]
    share: FloatArray
    through_initial_a: FloatArray
    through_half_a: FloatArray
    through_ip_a: FloatArray
    rest_initial_a: FloatArray
    rest_half_a: FloatArray
    rest_ip_a: FloatArray
    determined: BoolArray


@dataclass(frozen=True, slots=True, kw_only=True)
class FaultCase:
    """IEC 61363-1 for one case (maximum or minimum) of one mode.

    [place]: ``live``; ``ik_initial_a`` I''k; ``iac_half_a`` and ``idc_half_a`` at T/2; ``ip_a`` = sqrt2
    Iac(T/2) + idc(T/2); ``peak_a`` the greatest instantaneous current over all times and angles;
    ``ik_initial_nominal_a`` and ``ip_nominal_a`` without the tolerance of the reactances; ``r_over_x`` and
    ``cos_phi`` of the fault from its direct time constant at T/2; ``sustained_reach_a`` the low and
    ``sustained_duty_a`` the high estimate of the sustained current, for as long as each source holds it;
    ``parallel_paths`` True where a source reaches the place by parallel paths: outside the scope of
    IEC 61363-1, solved by nodal reduction.
    ``equivalent_half_a`` and ``equivalent_ip_a`` come from the standard's equivalent generator behind an
    impedance (NaN on boards that sources feed directly, where contributions are added one by one).

    [place, time]: ``iac_a`` and ``idc_a`` at ``time_s`` (few instants in the maximum case); the two-phase
    and line-earth ``iac_2ph_a`` and ``iac_earth_a`` (NaN where the neutral is not earthed); ``least_a`` the
    least of the three.
    [place, parting]: ``dc_part`` is idc / (sqrt2 Iac) at ``parting_s`` (above 1: no current zero).
    [place, source]: ``parts`` of the three-phase fault, ``parts_2ph`` and ``parts_earth`` of the others (all
    0 where the neutral is not earthed), and what each source gives to the three-phase fault:
    ``source_initial_a``, ``source_half_a`` (Iac at T/2), ``source_ip_a``; they add up to the place's. A fault
    at the terminals of one of several equal consumers has its own motor among that row's source. ``routes``
    tells what of it comes through any branch.
    """

    sources: FaultSources
    live: BoolArray
    parallel_paths: BoolArray
    ik_initial_a: FloatArray
    iac_half_a: FloatArray
    idc_half_a: FloatArray
    ip_a: FloatArray
    peak_a: FloatArray
    ik_initial_nominal_a: FloatArray
    ip_nominal_a: FloatArray
    r_over_x: FloatArray
    cos_phi: FloatArray
    sustained_reach_a: FloatArray
    sustained_duty_a: FloatArray
    equivalent_half_a: FloatArray
    equivalent_ip_a: FloatArray
    time_s: FloatArray
    iac_a: FloatArray
    idc_a: FloatArray
    iac_2ph_a: FloatArray
    iac_earth_a: FloatArray
    least_a: FloatArray
    parting_s: FloatArray
    dc_part: FloatArray
    parts: Exponentials
    parts_2ph: Exponentials
    parts_earth: Exponentials
    source_initial_a: FloatArray
    source_half_a: FloatArray
    source_ip_a: FloatArray
    ends: BranchEnds
    routes: FaultRoutes

    def shares(self, end: IntArray, place: IntArray) -> FloatArray:
        """Return `FaultRoutes.shares` for every column of ``parts``.

        What is taken over from motors goes the ways of the lasting sources, by their transient currents.

        Parameters
        ----------
        end : ndarray of int, shape (pair,)
            Rows of `BranchEnds`; -1 gives nothing.
        place : ndarray of int, shape (pair,)
            Faulted place of each pair.

        Returns
        -------
        ndarray, shape (pair, source)
            A at the voltage of the end per A at that of the place; positive from the end into its branch.
        """
        shares = self.routes.shares(end, place)
        if shares.shape[1] == self.parts.transient_a.shape[1]:
            return shares
        weight = self.parts.transient_a[place, : shares.shape[1]]
        total = weight.sum(axis=1)
        given = (weight * shares).sum(axis=1)
        mean = np.divide(given, total, out=np.zeros_like(total), where=total > 0.0)
        return np.concatenate([shares, mean[:, None]], axis=1)


@dataclass(frozen=True, slots=True, kw_only=True)
class DeviceFaults:
    """Every protective device in one mode, [device], in workbook order.

    ``place`` is the fault place at the device's end and ``end`` its row in the maximum case's `BranchEnds`
    (both -1 where the device is open or dead; ``end`` -1 also for a device on a board or a source without a
    cable, for which through is what the source gives itself). ``duty_*`` is the larger of own branch and
    rest: Iac(T/2), ip, I''k in A; ``duty_through`` says True where the own branch governs. ``dc_part`` is
    idc/(sqrt2 Iac) of that side at ``parting_s``, the device's least opening time plus half a cycle.

    ``ends`` [case, device] (maximum, minimum) is the row of the device's end in the case's `BranchEnds`, and
    ``own`` [case, device] the column of the source on which it stands without a cable; both -1 for none.

    Minimum case: ``operating_s`` is when the device has cleared by its own setting at high current
    (instantaneous, else short-time, with its breaking time; NaN where no such setting is given),
    ``far_place`` the far end of what it protects and ``least_a`` the least fault current there at that
    moment, through the device, ``least_kind`` of which fault; without a setting both are those of the end of
    the time grid.
    """

    names: tuple[str, ...]
    place: IntArray
    end: IntArray
    ends: IntArray
    own: IntArray
    duty_initial_a: FloatArray
    duty_half_a: FloatArray
    duty_ip_a: FloatArray
    duty_through: BoolArray
    parting_s: FloatArray
    dc_part: FloatArray
    operating_s: FloatArray
    far_place: IntArray
    least_a: FloatArray
    least_kind: tuple[str, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Iec60909Case:
    """IEC 60909 for one case of one mode, [place]; ``c`` is the voltage factor.

    ``ik_*_a`` is I''k of the three-phase, two-phase and line-earth fault (NaN where the neutral is not
    earthed), ``ip_3ph_a`` and ``ip_2ph_a`` the peaks by method C, ``ib_a`` the breaking current at
    ``delay_s``, ``ik_steady_a`` that without motors (the standard's factor lambda is left out), ``ith_a`` the
    thermal equivalent over ``duration_s``. ``pandapower_*`` are the library's figures for the same network,
    ``largest_difference`` the largest relative difference of I''k or ip between both (NaN: not compared), and
    ``comparison`` says in words what was compared.
    """

    c: FloatArray
    ik_3ph_a: FloatArray
    ik_2ph_a: FloatArray
    ik_earth_a: FloatArray
    ip_3ph_a: FloatArray
    ip_2ph_a: FloatArray
    ib_a: FloatArray
    ik_steady_a: FloatArray
    ith_a: FloatArray
    delay_s: float
    duration_s: float
    pandapower_ik_3ph_a: FloatArray
    pandapower_ip_3ph_a: FloatArray
    pandapower_ik_2ph_a: FloatArray
    largest_difference: float
    comparison: str


@dataclass(frozen=True, slots=True, kw_only=True)
class EarthSystem:
    """Boards joined without a transformer: one neutral, one earth-fault current.

    ``earthing`` is that of the boards; ``capacitance_f`` one phase to earth of all that is energised,
    ``capacitive_a`` the current of an earth fault by capacitance alone, ``resistor_a`` that of the neutral
    resistors (NaN: none), ``fault_a`` both together (NaN in a solidly or low-resistance earthed system:
    see the line-earth currents), ``largest_resistor_ohm`` the largest that damps an arcing fault,
    ``resistor_power_w`` the heat. ``capacitance_given`` is False where a cable's capacitance is typical.
    """

    boards: tuple[str, ...]
    u_nominal_v: float
    earthing: str
    capacitance_f: float
    capacitance_given: bool
    capacitive_a: float
    resistor_a: float
    fault_a: float
    largest_resistor_ohm: float
    resistor_power_w: float


@dataclass(frozen=True, slots=True, kw_only=True)
class QuickRow:
    """A rule of thumb for one island: multiples of rated currents, in A at the island's main voltage."""

    island: int
    boards: tuple[str, ...]
    rule: str
    quantity: str
    value_a: float
    basis: str


@dataclass(frozen=True, slots=True, kw_only=True)
class OneSetLeft:
    """The minimum with one supply in each island: that which keeps up least, then gives least.

    ``supplies`` names them; ``fewer`` is False where the mode runs no more than that. [place], A, NaN where
    dead: ``ik_initial_a`` I''k, ``least_100ms_a`` and ``least_1s_a`` the least of three-phase, two-phase and
    line-earth fault. ``device_least_a`` [device] is as `DeviceFaults.least_a`.
    """

    supplies: tuple[str, ...]
    fewer: bool
    ik_initial_a: FloatArray
    least_100ms_a: FloatArray
    least_1s_a: FloatArray
    device_least_a: FloatArray


@dataclass(frozen=True, slots=True, kw_only=True)
class ModeShortCircuit:
    """One mode; where ``solved`` is False ``reason`` says why, and every place is dead in all tables.

    ``maximum``: every set that may run in parallel, change-over included, and every motor in use, cold
    cables, reactances at the low end of their tolerance, loaded before the fault. ``minimum``: the sets that
    the mode runs, no motors, hot cables, reactances at the high end, no load before the fault; ``one_set``
    the same with one supply in each island.
    """

    mode: str
    solved: bool
    reason: str
    maximum: FaultCase
    minimum: FaultCase
    one_set: OneSetLeft
    iec60909_maximum: Iec60909Case
    iec60909_minimum: Iec60909Case
    devices: DeviceFaults
    earth: tuple[EarthSystem, ...]
    quick: tuple[QuickRow, ...]
    findings: tuple[str, ...]

    def device_shares(self, device: IntArray, place: IntArray, *, maximum: bool) -> FloatArray:
        """Return what comes through devices, for 1 A that each source gives at a faulted place.

        With the exponentials of the place (``parts``, ``parts_2ph``, ``parts_earth``) this is the current
        through any device at any instant, for a fault at any place: of its own branch, of a board behind it,
        or on its source's side.

        Parameters
        ----------
        device : ndarray of int, shape (pair,)
            Places in `DeviceFaults`.
        place : ndarray of int, shape (pair,)
            Faulted place of each pair.
        maximum : bool
            The maximum case, else the minimum.

        Returns
        -------
        ndarray, shape (pair, source)
            A at the device per A at the place; positive from the device's end into its branch (for a device
            without a branch: from the board into its equipment). 0 for an open or dead device.
        """
        case, row = (self.maximum, 0) if maximum else (self.minimum, 1)
        device, place = np.asarray(device, np.int64), np.asarray(place, np.int64)
        out = case.shares(self.devices.ends[row, device], place)
        own = self.devices.own[row, device]
        stands = np.flatnonzero(own >= 0)
        out[stands, own[stands]] = -case.routes.own_shares(own[stands], place[stands])
        return out


@dataclass(frozen=True, slots=True, kw_only=True)
class SimulatedFault:
    """A time simulation of one place in the maximum case beside the two standards.

    ``cases`` names the cases of the sheet Events that ask for it and ``cell`` the first of them. Where
    ``simulated`` is False ``reason`` says why, figures are NaN and arrays empty.

    Greatest peak and Iac at T/2 and 0.1 s [A] by the full-order machines, by IEC 61363-1 (``ship_*``) and by
    IEC 60909 (``general_*``; no Iac), of the sources that are simulated alone; ``left_out`` names the others.
    ``bias_low_percent`` and ``bias_high_percent`` [quantity] are the known differences of IEC 61363-1 at such
    a place in Iac(T/2), Iac(0.1 s), ip and the greatest peak, and ``behind`` says what kind of place it is.
    They are known for motors of up to ``motors_known_to`` times the rated current of the sets; here it is
    ``motors_over_sets``.

    [time]: ``iac_a`` by the machines and ``ship_iac_a`` at ``time_s``; ``wave_a`` is the instantaneous
    current of the phase with the greatest peak and ``ship_envelope_a`` sqrt2 Iac + idc at ``wave_time_s``.
    """

    cases: tuple[str, ...]
    cell: str
    mode: str
    place: str
    simulated: bool
    reason: str
    behind: str
    peak_a: float
    iac_half_a: float
    iac_100ms_a: float
    ship_peak_a: float
    ship_ip_a: float
    ship_iac_half_a: float
    ship_iac_100ms_a: float
    general_ip_a: float
    general_ik_initial_a: float
    bias_low_percent: FloatArray
    bias_high_percent: FloatArray
    motors_over_sets: float
    motors_known_to: float
    time_s: FloatArray
    iac_a: FloatArray
    ship_iac_a: FloatArray
    wave_time_s: FloatArray
    wave_a: FloatArray
    ship_envelope_a: FloatArray
    left_out: tuple[str, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class KnownBias:
    """Measured difference of IEC 61363-1 against a simulation of all windings, at one kind of place [%]."""

    place: str
    state: str
    quantity: str
    low_percent: float
    high_percent: float


@dataclass(frozen=True, slots=True, kw_only=True)
class ShortCircuitResult:
    """Short-circuit currents of every mode; ``simulated`` are the faults of the sheet Events."""

    places: Places
    f_hz: float
    modes: tuple[ModeShortCircuit, ...]
    simulated: tuple[SimulatedFault, ...]
    bias: tuple[KnownBias, ...]
