"""One case of one mode by IEC 61363-1, from the solved stages to the result."""

from __future__ import annotations

from dataclasses import dataclass, fields

import numpy as np
from numpy.typing import NDArray

from study.analyses.short_circuit_currents import (
    Stages,
    Sustained,
    fault_parts,
    half_cycle,
    in_amperes,
    solve_stages,
)
from study.analyses.short_circuit_ends import EndRows, branch_ends, end_rows, with_taken_over
from study.analyses.short_circuit_equivalent import behind_equivalent
from study.analyses.short_circuit_options import ShortCircuitOptions
from study.analyses.short_circuit_totals import ac_sums_at, greatest_peaks, sums_at, time_grid
from study.formulas.fault_current import SQRT2, SQRT3, FaultCurrent
from study.network.fault_network import FaultNetwork
from study.network.fault_zero_sequence import zero_sequence
from study.results.arrays import read_only
from study.results.short_circuit import Exponentials, FaultCase, FaultSources

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]

TAKEN_OVER = "taken over from motors"


@dataclass(frozen=True, slots=True, kw_only=True)
class CaseCurrents:
    """Currents of a case, as the study of devices needs them.

    ``parts``, ``two_phase`` and ``earth`` are exponentials [place, source] in A; ``share`` [end, source].
    """

    net: FaultNetwork
    rows: EndRows
    share: FloatArray
    parts: FaultCurrent
    two_phase: FaultCurrent
    earth: FaultCurrent | None
    ends_s: FloatArray


@dataclass(frozen=True, slots=True, kw_only=True)
class SolvedCase(CaseCurrents):
    """A case with its stages and its result."""

    stages: Stages
    case: FaultCase


def solve_case(net: FaultNetwork, nominal: FaultNetwork | None, options: ShortCircuitOptions) -> SolvedCase:
    """Return one case of one mode.

    Parameters
    ----------
    net : FaultNetwork
        The network of the case.
    nominal : FaultNetwork, optional
        The same without the tolerance of the reactances; without it the nominal figures are the case's own.
    options : ShortCircuitOptions
        Instants of the direct component.

    Returns
    -------
    SolvedCase
        Currents in A at the voltage of each place.
    """
    hz = net.plant.network.plant.project.f_rated_hz
    stages = solve_stages(net)
    own, sustained = fault_parts(net, stages, None, 1.0)
    z2 = np.where(stages.negative.fed, stages.negative.z_place, np.inf)
    two_phase = in_amperes(net, fault_parts(net, stages, z2, SQRT3)[0])
    z0 = zero_sequence(net)
    earth = None
    if np.isfinite(z0).any():
        earth = in_amperes(net, fault_parts(net, stages, z2 + z0, 3.0)[0])
    rows = end_rows(net)
    share = with_taken_over(rows, own.transient_a, own.subtransient_a.shape[1])
    parts = in_amperes(net, own)
    ends_s = np.append(net.sources.ends_s, [np.inf] * (parts.dc_a.shape[1] - len(net.sources.ends_s)))
    case = _Assembler(net, stages, parts, ends_s, options).case(
        own=own,
        sustained=sustained,
        nominal=_nominal(nominal, stages, hz),
        two_phase=two_phase,
        earth=earth,
        rows=rows,
        share=share,
    )
    return SolvedCase(
        net=net,
        stages=stages,
        rows=rows,
        share=share,
        parts=parts,
        two_phase=two_phase,
        earth=earth,
        ends_s=ends_s,
        case=case,
    )


def _nominal(net: FaultNetwork | None, lasting: Stages, hz: float) -> tuple[FloatArray, FloatArray] | None:
    if net is None:
        return None
    parts = in_amperes(net, fault_parts(net, solve_stages(net, lasting), None, 1.0)[0])
    ac, dc = half_cycle(parts, hz)
    return parts.subtransient_a.sum(axis=1), (SQRT2 * ac + dc).sum(axis=1)


class _Assembler:
    def __init__(
        self,
        net: FaultNetwork,
        stages: Stages,
        parts: FaultCurrent,
        ends_s: FloatArray,
        options: ShortCircuitOptions,
    ) -> None:
        self.net, self.stages, self.parts, self.ends_s = net, stages, parts, ends_s
        self.options, self.hz = options, net.plant.network.plant.project.f_rated_hz
        self.live = stages.subtransient.fed
        self.base = net.plant.base_a[net.plant.place_node]

    def _only_live(self, values: FloatArray) -> FloatArray:
        mask = self.live if values.ndim == 1 else self.live[:, None]
        return read_only(np.where(mask, values, np.nan))

    def case(
        self,
        *,
        own: FaultCurrent,
        sustained: Sustained,
        nominal: tuple[FloatArray, FloatArray] | None,
        two_phase: FaultCurrent,
        earth: FaultCurrent | None,
        rows: EndRows,
        share: FloatArray,
    ) -> FaultCase:
        hz, parts = self.hz, self.parts
        times = time_grid(hz, fine=not self.net.options.maximum)
        half, dc_half = half_cycle(parts, hz)
        initial = parts.subtransient_a
        ac, dc = sums_at(parts, self.ends_s, times)
        ac2 = ac_sums_at(two_phase, self.ends_s, times)
        ac2[~(two_phase.subtransient_a.sum(axis=1) > 0.0)] = np.nan
        ac1 = np.full_like(ac, np.nan)
        if earth is not None:
            ac1 = ac_sums_at(earth, self.ends_s, times)
            ac1[~(earth.subtransient_a.sum(axis=1) > 0.0)] = np.nan
        ip = (SQRT2 * half + dc_half).sum(axis=1)
        total_initial = initial.sum(axis=1)
        parting = np.array(self.options.parting_s)
        ac_part, dc_part = sums_at(parts, self.ends_s, parting)
        eq_half, eq_ip = behind_equivalent(self.net, rows, own)
        r_over_x = self._r_over_x(parts.dc_a.sum(axis=1), dc_half.sum(axis=1))
        n_initial, n_ip = (total_initial, ip) if nominal is None else nominal
        only = self._only_live
        with np.errstate(invalid="ignore", divide="ignore"):
            dc_fraction = dc_part / (SQRT2 * ac_part)
        return FaultCase(
            sources=self._sources(),
            live=read_only(self.live, np.bool_),
            parallel_paths=read_only(self._parallel(), np.bool_),
            ik_initial_a=only(total_initial),
            iac_half_a=only(half.sum(axis=1)),
            idc_half_a=only(dc_half.sum(axis=1)),
            ip_a=only(ip),
            peak_a=only(greatest_peaks(parts, self.ends_s, hz)),
            ik_initial_nominal_a=only(n_initial),
            ip_nominal_a=only(n_ip),
            r_over_x=only(r_over_x),
            cos_phi=only(r_over_x / np.hypot(1.0, r_over_x)),
            sustained_reach_a=only(sustained.reach.sum(axis=1) * self.base),
            sustained_duty_a=only(sustained.duty.sum(axis=1) * self.base),
            equivalent_half_a=only(eq_half * self.base),
            equivalent_ip_a=only(eq_ip * self.base),
            time_s=read_only(times),
            iac_a=only(ac),
            idc_a=only(dc),
            iac_2ph_a=only(ac2),
            iac_earth_a=only(ac1),
            least_a=only(np.fmin(np.fmin(ac, ac2), ac1)),
            parting_s=read_only(parting),
            dc_part=only(dc_fraction),
            parts=self._exponentials(parts),
            parts_2ph=self._exponentials(two_phase),
            parts_earth=self._exponentials(parts if earth is None else earth, none=earth is None),
            source_initial_a=read_only(initial),
            source_half_a=read_only(half),
            source_ip_a=read_only(SQRT2 * half + dc_half),
            ends=branch_ends(self.net, rows, share, (initial, half, dc_half)),
            routes=rows.routes,
        )

    def _exponentials(self, parts: FaultCurrent, *, none: bool = False) -> Exponentials:
        values = {f.name: getattr(parts, f.name) for f in fields(FaultCurrent)}
        if none:
            values |= {k: 0.0 * v for k, v in values.items() if k.endswith("_a")}
        return Exponentials(**{k: read_only(v) for k, v in values.items()}, ends_s=read_only(self.ends_s))

    def _r_over_x(self, dc_start: FloatArray, dc_half: FloatArray) -> FloatArray:
        """Return R/X from the fall of the direct component in half a cycle, else of the impedance."""
        falls = (dc_start > 0.0) & (dc_half > 0.0) & (dc_half < dc_start)
        ratio = np.where(falls, dc_start, np.e) / np.where(falls, dc_half, 1.0)
        by_dc = np.log(ratio) / np.pi  # R/X = 1/(w Tdc), Tdc = (T/2)/ln(start/half)
        z = np.where(self.live, self.stages.subtransient.z_place, 1j)
        return np.where(falls, by_dc, z.real / z.imag)

    def _parallel(self) -> NDArray[np.bool_]:
        """Return True in islands where buses close a ring; branches side by side count as one."""
        net = self.net
        pairs = {(min(a, b), max(a, b)) for a, b in zip(net.from_bus, net.to_bus, strict=True) if a != b}
        buses = np.bincount(net.bus_island, minlength=1)
        edges = (
            np.bincount([net.bus_island[a] for a, _ in pairs], minlength=len(buses)) if pairs else 0 * buses
        )
        ring = edges > buses - 1
        return (net.place_bus >= 0) & ring[np.maximum(net.place_island, 0)]

    def _sources(self) -> FaultSources:
        net, s = self.net, self.net.sources
        hz = self.hz
        node = np.array([x.node for x in s.supplies], np.int64)
        base = net.plant.base_a[node]
        ac, dc = half_cycle(s.bare.current, hz)
        holds = tuple(h.words for h in s.holdings)
        lasts = np.array([h.lasts_s for h in s.holdings], float)
        more = self.parts.dc_a.shape[1] - len(s.supplies)
        zero = [0.0] * more

        def with_more(values: FloatArray) -> FloatArray:
            return read_only(np.append(values, zero))

        return FaultSources(
            names=(*(x.name for x in s.supplies), *[TAKEN_OVER] * more),
            kinds=(*(x.kind for x in s.supplies), *[TAKEN_OVER] * more),
            boards=(*(x.board for x in s.supplies), *[""] * more),
            island=read_only(np.append(s.island, [-1] * more), np.int64),
            rated_a=with_more(np.array([x.rated_a for x in s.supplies], float)),
            initial_a=with_more(s.bare.current.subtransient_a * base),
            peak_a=with_more((SQRT2 * ac + dc) * base),
            sustained_a=with_more(s.bare.current.sustained_a * base),
            sustained_known=read_only([*(h.known for h in s.holdings), *[True] * more], np.bool_),
            holds=(*holds, *["what lasting sources give more as motors die away"] * more),
            holds_s=with_more(lasts),
            preload=with_more(s.preload),
        )
