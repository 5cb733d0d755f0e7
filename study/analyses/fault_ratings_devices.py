"""Breakers and fuses: making, breaking and short-time withstand in every mode."""

from __future__ import annotations

from typing import Final

import numpy as np
from numpy.typing import NDArray

from study.analyses.fault_ratings_boards import MEDIUM_VOLTAGE_V, nominal_ratios
from study.analyses.fault_ratings_clearing import DELAYED, STAGES
from study.analyses.fault_ratings_series import (
    LOW_VOLTAGE_KA,
    R10_KA,
    Stacked,
    given,
    greatest,
    next_usual,
    peak_factor_above_1_kv,
    worst_mode,
)
from study.analyses.fault_ratings_sides import PlantDevices, Sides, cut_off_peaks_a
from study.formulas.fault_current import SQRT2
from study.formulas.fault_duty import (
    breaker_test_power_factor,
    equivalent_short_time_current_a,
    fault_power_factor,
    making_ratio,
    required_breaking_capacity,
)
from study.formulas.fault_duty_mv import (
    STANDARD_TIME_CONSTANT_S,
    asymmetrical_breaking_current_a,
    rated_dc_component,
)
from study.formulas.fault_iec60909 import kappa_factor
from study.model.plant import Plant
from study.model.protection import Device
from study.results.arrays import read_only
from study.results.fault_ratings import DeviceRatings, DeviceRule
from study.results.short_circuit import ModeShortCircuit, ShortCircuitResult

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]
Arrays = dict[str, NDArray[np.generic]]

# Up to this direct component the symmetrical breaking current covers all; IEC 62271-100, from memory.
SYMMETRICAL_UP_TO: Final = 0.20


class RatedDevices:
    """Breakers and fuses of a plant with their ratings, [device]; `rows` are their places in the workbook."""

    def __init__(self, plant: Plant, result: ShortCircuitResult) -> None:
        self.rows = [k for k, d in enumerate(plant.devices) if d.kind in ("circuit breaker", "fuse")]
        self.devices: list[Device] = [plant.devices[k] for k in self.rows]
        volts, f_hz = _volts_at(plant, result), result.f_hz
        self.rules: tuple[DeviceRule, ...] = tuple(_rule(plant.devices[k], volts[k]) for k in self.rows)
        self.fuse = np.array([rule == "fuse" for rule in self.rules], bool)
        self.high = np.array([rule == "medium-voltage breaker" for rule in self.rules], bool)
        self.low = ~(self.fuse | self.high)
        self.factor = peak_factor_above_1_kv(f_hz)
        self.icu, self.ics = (given([getattr(d, x) for d in self.devices]) for x in ("icu_ka", "ics_ka"))
        self.icw = given([d.icw_ka for d in self.devices])
        self.icw_s = given([d.icw_duration_s for d in self.devices])
        declared = given([d.icm_ka for d in self.devices])
        self.declared = ~np.isnan(declared)
        making = np.where(self.declared, declared, self._peak_of(self.icu))
        self.making = np.where(self.fuse, np.nan, making)
        self.closed_peak = np.where(self.fuse, np.nan, self._peak_of(self.icw))
        opening = given([d.opening_time_min_s for d in self.devices])
        self.rated_dc = np.where(
            self.high, rated_dc_component(opening, STANDARD_TIME_CONSTANT_S, f_hz), np.nan
        )
        self.rated_asymmetrical = asymmetrical_breaking_current_a(
            self.icu, np.fmax(self.rated_dc, np.where(self.high, SYMMETRICAL_UP_TO, np.nan))
        )
        self.test_cos_phi = given([d.test_cos_phi for d in self.devices])

    def _peak_of(self, rms_ka: FloatArray) -> FloatArray:
        """Return the peak that goes with a rated r.m.s. current."""
        there = np.where(np.isnan(rms_ka), 1.0, rms_ka)
        return np.where(self.high, self.factor, making_ratio(there)) * rms_ka


def _rule(device: Device, volts: float) -> DeviceRule:
    if device.kind == "fuse":
        return "fuse"
    return "medium-voltage breaker" if volts > MEDIUM_VOLTAGE_V else "low-voltage breaker"


def _volts_at(plant: Plant, result: ShortCircuitResult) -> FloatArray:
    """Return the voltage where each device stands; of one that is never live, its own rated voltage."""
    volts = np.zeros(len(plant.devices))
    for mode in result.modes:
        place = mode.devices.place
        volts = np.where(place >= 0, result.places.u_nominal_v[place], volts)
    own = np.array([d.u_rated_v or 0.0 for d in plant.devices], float)
    return np.where(volts > 0.0, volts, own)


def device_ratings(
    rated: RatedDevices, devices: PlantDevices, sides: list[Sides], result: ShortCircuitResult
) -> DeviceRatings:
    """Return what every breaker and fuse must make, break and carry in every mode.

    Parameters
    ----------
    rated : RatedDevices
        Their ratings.
    devices : PlantDevices
        Releases and makers' sheets of all devices.
    sides : list of Sides
        Both sides of all devices, one item for each mode.
    result : ShortCircuitResult
        Currents.

    Returns
    -------
    DeviceRatings
        Breakers and fuses in workbook order.
    """
    modes = [
        _mode(rated, devices, side, mode, result.f_hz) for side, mode in zip(sides, result.modes, strict=True)
    ]
    table = Stacked(modes, len(rated.rows))
    live = table["live"] > 0.0
    breaking = np.fmin(rated.icu, rated.ics)
    parting = given([d.opening_time_min_s for d in rated.devices]) + 0.5 / result.f_hz
    needed = greatest(np.where(live, table["suffices_ka"], np.nan))
    heat = table["heat_ka"]
    return DeviceRatings(
        names=tuple(d.name for d in rated.devices),
        rules=rated.rules,
        stages=STAGES,
        icu_ka=read_only(rated.icu),
        ics_ka=read_only(rated.ics),
        icw_ka=read_only(rated.icw),
        icw_duration_s=read_only(rated.icw_s),
        making_peak_ka=read_only(rated.making),
        making_declared=read_only(rated.declared, np.bool_),
        live=read_only(live, np.bool_),
        initial_ka=read_only(table["initial_ka"]),
        half_ka=read_only(table["half_ka"]),
        peak_ka=read_only(table["peak_ka"]),
        through=read_only(table["through"], np.bool_),
        cos_phi=read_only(table["cos_phi"]),
        needed_ka=read_only(table["needed_ka"]),
        peak_governs=read_only(table["peak_governs"], np.bool_),
        parting_s=read_only(parting),
        parting_ka=read_only(table["parting_ka"]),
        dc_part=read_only(table["dc_part"]),
        rated_dc_part=read_only(rated.rated_dc),
        asymmetrical_ka=read_only(table["asymmetrical_ka"]),
        rated_asymmetrical_ka=read_only(rated.rated_asymmetrical),
        clearing_s=read_only(table["clearing_s"]),
        cleared_by=read_only(table["cleared_by"], np.int64),
        delayed=read_only(table["delayed"], np.bool_),
        heat_ka=read_only(heat),
        closed_peak_ka=read_only(table["closed_peak_ka"]),
        rated_closed_peak_ka=read_only(rated.closed_peak),
        cut_off_peak_ka=read_only(table["cut_off_ka"]),
        nominal_peak=read_only(table["nominal_peak"]),
        nominal_initial=read_only(table["nominal_initial"]),
        enough_breaking_ka=read_only(
            np.where(rated.high, next_usual(needed, R10_KA), next_usual(needed, LOW_VOLTAGE_KA))
        ),
        worst_mode=read_only(
            worst_mode(
                live,
                table["peak_ka"] / rated.making[:, None],
                table["needed_ka"] / breaking[:, None],
                table["asymmetrical_ka"] / rated.rated_asymmetrical[:, None],
                heat / rated.icw[:, None],
                table["peak_ka"],
            ),
            np.int64,
        ),
    )


def _mode(
    rated: RatedDevices, devices: PlantDevices, sides: Sides, mode: ModeShortCircuit, f_hz: float
) -> Arrays:
    rows = np.array(rated.rows, np.int64)
    faults = mode.devices
    initial, half, peak = (
        x[rows] / 1000.0 for x in (faults.duty_initial_a, faults.duty_half_a, faults.duty_ip_a)
    )
    live = sides.live[rows]
    nominal_peak, nominal_initial = nominal_ratios(mode.maximum, faults.place[rows])
    cos_phi = _fault_cos_phi(sides, faults.duty_through, f_hz)[rows]
    covers = _required_ka(half, peak)
    parting = _parting(rated, sides, rows, faults.parting_s)
    return {
        "live": live,
        "initial_ka": initial,
        "half_ka": half,
        "peak_ka": peak,
        "through": faults.duty_through[rows],
        "cos_phi": cos_phi,
        "nominal_peak": nominal_peak,
        "nominal_initial": nominal_initial,
        "cut_off_ka": cut_off_peaks_a(devices, sides, faults.duty_ip_a)[rows] / 1000.0,
        "suffices_ka": np.select(
            [rated.fuse, rated.high], [initial, _suffices_ka(rated, half, peak, parting)], covers
        ),
        **parting,
        **_carrying(rated, sides, rows, 0.5 / f_hz),
        **_breaking(rated, initial, half, np.stack([peak, covers, cos_phi])),
    }


def _fault_cos_phi(sides: Sides, through: NDArray[np.bool_], f_hz: float) -> FloatArray:
    """Return the power factor of the governing side from the fall of its direct component in T/2."""
    half = np.full(len(through), 0.5 / f_hz)
    start, later = (
        np.where(through, *(h.dc_at_a(time) for h in sides.histories)) for time in (0.0 * half, half)
    )
    falls = (start > later) & (later > 0.0)
    t_dc = half / np.log(np.where(falls, start, np.e) / np.where(falls, later, 1.0))
    return np.asarray(np.where(falls, fault_power_factor(t_dc, f_hz), np.nan))


def _breaking(rated: RatedDevices, initial: FloatArray, half: FloatArray, of_peak: FloatArray) -> Arrays:
    """Return the breaking capacity asked for; `of_peak` holds ip, what covers it by table, and cos phi.

    Where the fault's power factor is not below that of the breaker's test, Iac(T/2) is enough to ask for; an
    unknown power factor counts as below. A test at a lower power factor than the standard's covers more.
    """
    peak, covers, cos_phi = of_peak
    by_table = breaker_test_power_factor(np.nan_to_num(rated.icu, nan=1.0))
    tested = np.where(np.isnan(rated.test_cos_phi), by_table, rated.test_cos_phi)
    own_ratio = SQRT2 * kappa_factor(tested / np.sqrt(1.0 - np.minimum(tested, 0.999) ** 2))
    by_peak = np.where(rated.test_cos_phi < by_table, np.fmax(half, peak / own_ratio), covers)
    needed = np.where(rated.fuse, initial, np.where(rated.low & ~(cos_phi >= tested), by_peak, half))
    return {"needed_ka": needed, "peak_governs": rated.low & (needed > half)}


def _required_ka(half: FloatArray, peak: FloatArray) -> FloatArray:
    found = np.full(len(half), np.nan)
    there = np.flatnonzero((half > 0.0) & (peak > 0.0))
    pairs, back = np.unique(np.stack([half[there], peak[there]]), axis=1, return_inverse=True)
    each = [required_breaking_capacity(float(a), float(b)).breaking_ka for a, b in pairs.T]
    found[there] = np.array(each, float)[back.ravel()] if each else 0.0
    return found


def _parting(rated: RatedDevices, sides: Sides, rows: IntArray, parting_s: FloatArray) -> Arrays:
    """Return Iac, the direct component and both together when the contacts part, above 1 kV."""
    ac, dc = (
        np.stack([getattr(h, name)(parting_s) for h in sides.histories])[:, rows] / 1000.0
        for name in ("ac_at_a", "dc_at_a")
    )
    both = np.hypot(ac, dc)
    worse = both.argmax(axis=0)
    column = np.arange(len(rows))
    where = rated.high & sides.live[rows]
    ac_there = ac[worse, column]
    part = np.divide(dc[worse, column], SQRT2 * ac_there, out=np.zeros_like(ac_there), where=ac_there > 0.0)
    return {
        "parting_ka": np.where(where, ac.max(axis=0), np.nan),
        "dc_part": np.where(where, part, np.nan),
        "asymmetrical_ka": np.where(where, both[worse, column], np.nan),
    }


def _suffices_ka(rated: RatedDevices, half: FloatArray, peak: FloatArray, parting: Arrays) -> FloatArray:
    """Return the breaking capacity that suffices in every way, above 1 kV."""
    asymmetry = asymmetrical_breaking_current_a(1.0, np.fmax(rated.rated_dc, SYMMETRICAL_UP_TO))
    by_dc = np.asarray(parting["asymmetrical_ka"], float) / asymmetry
    return np.asarray(np.fmax(np.fmax(half, peak / rated.factor), by_dc))


def _carrying(rated: RatedDevices, sides: Sides, rows: IntArray, half_s: float) -> Arrays:
    """Return when the side that heats a device more is cleared, and what it carries closed until then."""
    delayed = np.isin(sides.stage, DELAYED)[:, rows] & ~rated.fuse
    heat = np.nan_to_num(sides.heat_a2s[:, rows], nan=0.0)
    column, half = np.arange(len(rows)), np.full(len(sides.live), half_s)
    peaks = np.stack([SQRT2 * h.ac_at_a(half) + h.dc_at_a(half) for h in sides.histories])[:, rows]
    worse = np.where(delayed.any(axis=0), np.where(delayed, heat, -1.0).argmax(axis=0), heat.argmax(axis=0))
    held = delayed.any(axis=0)
    seconds = equivalent_short_time_current_a(heat[worse, column], rated.icw_s)
    return {
        "clearing_s": sides.time_s[:, rows][worse, column],
        "cleared_by": sides.stage[:, rows][worse, column],
        "delayed": held,
        "heat_ka": np.where(held, seconds / 1000.0, np.nan),
        "closed_peak_ka": np.where(held, np.where(delayed, peaks, 0.0).max(axis=0) / 1000.0, np.nan),
    }
