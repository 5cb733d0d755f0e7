"""The fault network as a pandapower network, and its IEC 60909 currents beside ours.

Every set, motor and supply has a bus of its own, behind its real cable or 10 nanoohm; boards joined by ties
without impedance are one bus. Converter supplies are left out: the comparison is of the impedances.
"""

from __future__ import annotations

import logging
import warnings
from collections.abc import Iterator, Mapping, Sequence
from contextlib import contextmanager
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from study.formulas.fault_iec60909 import LvTolerance
from study.model.branches import ThreeWindingTransformer, Transformer
from study.model.sources import Genset, SynchronousMotor
from study.network.fault_network import FaultNetwork
from study.network.fault_supplies import Supply
from study.network.fault_tables import (
    Columns,
    generator_columns,
    motor_columns,
    shore_columns,
    three_winding_columns,
    two_winding_columns,
)
from study.network.solver_empty import empty_network

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]

LINK_OHM = 1e-8  # between a source without a cable and its board


@dataclass(frozen=True, slots=True, kw_only=True)
class LibraryCurrents:
    """Currents at each place, in A; NaN where dead.

    I''k of the three- and two-phase fault and ip of the three-phase one.
    """

    ik_3ph_a: FloatArray
    ik_2ph_a: FloatArray
    ip_3ph_a: FloatArray


def library_currents(
    nets: Sequence[FaultNetwork], lv_tolerance_percent: LvTolerance, *, all_places: bool
) -> tuple[LibraryCurrents, ...]:
    """Return pandapower's IEC 60909 currents of cases.

    All cases of one kind, maximum or minimum, are one network of many islands: a call of the library costs
    far more than what it computes. It takes the generators' fictitious resistance for kappa by itself.

    Parameters
    ----------
    nets : sequence of FaultNetwork
        Networks of the ship method; all of one plant.
    lv_tolerance_percent : {6, 10}
        Chooses the voltage factors.
    all_places : bool
        Also at consumers' terminals without a motor, where only a series impedance is added, and the
        two-phase fault.

    Returns
    -------
    tuple of LibraryCurrents
        At the voltage of each place, in the order given.
    """
    log = logging.getLogger("pandapower.shortcircuit.calc_sc")
    level = log.level
    log.setLevel(logging.ERROR)  # it warns of every network with a generator
    found: dict[int, LibraryCurrents] = {}
    try:
        for maximum in (True, False):
            rows = [k for k, x in enumerate(nets) if x.options.maximum == maximum]
            parts = [_Part(nets[k], all_places=all_places, tolerance=lv_tolerance_percent) for k in rows]
            found |= dict(zip(rows, _currents(parts, lv_tolerance_percent, all_places), strict=True))
    finally:
        log.setLevel(level)
    return tuple(found[k] for k in range(len(nets)))


def library_network(net: FaultNetwork, lv_tolerance_percent: LvTolerance, *, all_places: bool) -> Any:
    """Return a case as a pandapower network, ready for `calc_sc`, generators with their real resistance.

    Parameters
    ----------
    net : FaultNetwork
        The network of the ship method.
    lv_tolerance_percent : {6, 10}
        Chooses the voltage factors.
    all_places : bool
        Also with the terminals of consumers without a motor.

    Returns
    -------
    pandapowerNet
        Its buses are named by number.
    """
    return _library([_Part(net, all_places=all_places, tolerance=lv_tolerance_percent)])


def _currents(
    parts: Sequence[_Part], tolerance: LvTolerance, all_places: bool
) -> tuple[LibraryCurrents, ...]:
    """Return the currents of cases that are all maximum or all minimum."""
    fed = [x for x in parts if x.feeds]
    columns: dict[str, FloatArray] = {}
    if fed:
        from pandapower.shortcircuit import calc_sc

        grid = _library(fed)
        how: dict[str, Any] = {
            "case": "max" if fed[0].fault.options.maximum else "min",
            "lv_tol_percent": tolerance,
            "inverse_y": False,  # factors, not the whole inverse of many islands
        }
        with _without_compiling(), warnings.catch_warnings():
            warnings.simplefilter("ignore")
            calc_sc(grid, fault="3ph", ip=True, kappa_method="C", topology="meshed", **how)
            columns["three"] = grid.res_bus_sc["ikss_ka"].to_numpy()
            columns["peak"] = grid.res_bus_sc["ip_ka"].to_numpy()
            if all_places:
                calc_sc(grid, fault="2ph", **how)
                columns["two"] = grid.res_bus_sc["ikss_ka"].to_numpy()
    starts = dict(zip(map(id, fed), _starts(fed), strict=True))
    return tuple(_at_places(x, starts.get(id(x)), columns) for x in parts)


@contextmanager
def _without_compiling() -> Iterator[None]:
    """Let the library build its matrix by numpy: it would compile a loop for two seconds in every process."""
    from pandapower.pypower.makeYbus import makeYbus
    from pandapower.shortcircuit import impedance

    compiled = impedance.makeYbus
    impedance.makeYbus = makeYbus
    try:
        yield
    finally:
        impedance.makeYbus = compiled


def _at_places(part: _Part, start: int | None, columns: Mapping[str, FloatArray]) -> LibraryCurrents:
    nothing = np.full(len(part.fault.place_bus), np.nan)
    if start is None:
        return LibraryCurrents(ik_3ph_a=nothing, ik_2ph_a=nothing, ip_3ph_a=nothing)
    three = part.at_places(1000.0 * columns["three"], start)
    two = part.at_places(1000.0 * columns["two"], start) if "two" in columns else nothing
    peak = part.at_places(1000.0 * columns["peak"], start)
    return LibraryCurrents(ik_3ph_a=three, ik_2ph_a=two, ip_3ph_a=peak)


_BUSES = {
    "impedance": ("from_bus", "to_bus"),
    "trafo": ("hv_bus", "lv_bus"),
    "trafo3w": ("hv_bus", "mv_bus", "lv_bus"),
    "gen": ("bus",),
    "ext_grid": ("bus",),
    "motor": ("bus",),
}


def _starts(parts: Sequence[_Part]) -> list[int]:
    """Return the number of each part's first bus in the joint network."""
    counts = [len(x.columns["bus"]["vn_kv"]) for x in parts]
    return [sum(counts[:k]) for k in range(len(counts))]


def _library(parts: Sequence[_Part]) -> Any:
    """Return cases as one pandapower network, side by side."""
    first = parts[0].fault.plant.network
    net = empty_network(first.plant.project.f_rated_hz, first.s_base_kva)
    for name in ("bus", *_BUSES):
        joined: dict[str, list[Any]] = {}
        for part, start in zip(parts, _starts(parts), strict=True):
            for column, values in part.columns.get(name, {}).items():
                shifted = column in _BUSES.get(name, ())
                joined.setdefault(column, []).extend([v + start for v in values] if shifted else list(values))
        if joined:
            _put(net, name, joined)
    return net


def _put(net: Any, table: str, columns: Mapping[str, Any]) -> None:
    """Fill a table of the library; columns that are not given are empty."""
    import pandas as pd

    types = net[table].dtypes
    count = len(next(iter(columns.values())))
    filled: dict[str, Any] = {}
    for name, dtype in types.items():
        if name in columns:
            filled[name] = pd.Series(columns[name], dtype=dtype)
        else:
            filled[name] = np.full(count, np.nan) if dtype.kind == "f" else np.full(count, None, object)
    filled |= {k: v for k, v in columns.items() if k not in filled}
    net[table] = pd.DataFrame(filled)


class _Part:
    """One mode and case as columns of the library's tables, its buses numbered from 0."""

    def __init__(self, net: FaultNetwork, *, all_places: bool, tolerance: LvTolerance) -> None:
        self.fault, self.tolerance = net, tolerance
        self.columns: dict[str, Columns] = {}
        network = net.plant.network
        self.s_base = network.s_base_kva / 1000.0
        nodes = np.array(net.view.island) >= 0
        nodes[[k for k, n in enumerate(network.topology.nodes) if n.kind == "star"]] = False
        if not all_places:
            passive = (net.stub >= 0) & (net.place_own < 0)
            nodes[net.plant.place_node[passive]] = False
        self.nodes = np.flatnonzero(nodes)
        roots = np.array(net.view.bus, np.int64)
        numbers = np.unique(roots[self.nodes], return_inverse=True)[1]
        self.bus_of = np.full(len(nodes), -1, np.int64)
        self.bus_of[self.nodes] = numbers
        self.count = int(numbers.max(initial=-1)) + 1
        self.vn = np.zeros(self.count)
        self.vn[numbers] = network.u_base_v[self.nodes] / 1000.0
        self.links: list[tuple[int, int, complex]] = []
        self.extra_vn: list[float] = []
        self.gens: list[Supply] = []
        self._branches()
        self._sources()
        self._fill_buses()

    def _new_bus(self, vn_kv: float) -> int:
        self.extra_vn.append(vn_kv)
        return self.count + len(self.extra_vn) - 1

    def _branches(self) -> None:
        net, topology, plant = self.fault, self.fault.plant.network.topology, self.fault.plant.network.plant
        place = np.flatnonzero((net.stub >= 0) & (net.place_bus >= 0))
        place = place[self.bus_of[net.plant.place_node[place]] >= 0]
        for p in place:
            node = int(net.plant.place_node[p])
            branch = topology.branches[net.stub[p]]
            board = branch.to_node if branch.from_node == node else branch.from_node
            self.links.append((int(self.bus_of[board]), int(self.bus_of[node]), complex(net.place_z[p])))
        two: list[tuple[Transformer, tuple[int, int], float]] = []
        three: list[tuple[ThreeWindingTransformer, tuple[int, int, int], float]] = []
        for n, k in enumerate(net.live):
            b = topology.branches[k]
            ends = int(self.bus_of[b.from_node]), int(self.bus_of[b.to_node])
            if b.kind == "transformer":
                t, tap = plant.transformers[b.index], net.mode.set_points.get(b.name)
                change = t.tap_pu if tap is None or tap.tap_pu is None else tap.tap_pu
                two.append((t, ends, change))
            elif b.winding == "primary":
                t3, tap = plant.three_winding[b.index], net.mode.set_points.get(b.name)
                change = t3.tap_pu if tap is None or tap.tap_pu is None else tap.tap_pu
                mv, lv = (int(self.bus_of[topology.branches[j].to_node]) for j in (k + 1, k + 2))
                three.append((t3, (ends[0], mv, lv), change))
            elif not b.winding:
                self.links.append((*ends, complex(net.z[n])))
        if two:
            self.columns["trafo"] = two_winding_columns(two)
        if three:
            self.columns["trafo3w"] = three_winding_columns(net, three, self.tolerance)

    def _sources(self) -> None:
        shores: list[tuple[int, Supply]] = []
        motors: list[tuple[int, float, Supply]] = []
        self.gen_bus: list[int] = []
        for s in self.fault.sources.supplies:
            if s.kind == "converter supply":
                continue
            place = self.fault.plant.place_of_node[s.node]
            has_cable = self.fault.stub[place] >= 0
            if isinstance(s.item, Genset | SynchronousMotor):
                self.gens.append(s)
                self.gen_bus.append(int(self.bus_of[s.node]) if has_cable else self._beside(s))
            elif s.kind == "shore supply":
                shores.append((int(self.bus_of[s.node]) if has_cable else self._beside(s), s))
            elif not has_cable:
                motors.append((self._beside(s), 1.0, s))
            else:
                motors.append((int(self.bus_of[s.node]), 1.0 / s.units, s))
                if s.units > 1.0:
                    rest = self._new_bus(float(self.vn[self.bus_of[s.node]]))
                    board = next(i for i, j, _ in self.links if j == self.bus_of[s.node])
                    self.links.append((board, rest, s.lead * s.units / (s.units - 1.0)))
                    motors.append((rest, 1.0 - 1.0 / s.units, s))
        self.feeds = bool(self.gens or shores or motors)
        items = [s.item for s in self.gens if isinstance(s.item, Genset | SynchronousMotor)]
        if items:
            columns = generator_columns(items, self.gen_bus)
            own = [x.machine.r_stator_pu * x.u_rated_v**2 / (1000.0 * x.s_rated_kva) for x in items]
            self.columns["gen"] = columns | {"rdss_ohm": own}
        if shores:
            self.columns["ext_grid"] = shore_columns(shores, self.s_base)
        if motors:
            u_v = [float(self.fault.plant.network.u_base_v[s.node]) for _, _, s in motors]
            self.columns["motor"] = motor_columns(motors, u_v, self.s_base)

    def _beside(self, s: Supply) -> int:
        board = int(self.bus_of[s.node])
        vn = float(self.vn[board])
        bus = self._new_bus(vn)
        self.links.append((board, bus, 1j * LINK_OHM * self.s_base / vn**2))
        return bus

    def _fill_buses(self) -> None:
        vn = np.concatenate([self.vn, self.extra_vn])
        self.columns["bus"] = {
            "name": [str(k) for k in range(len(vn))],
            "vn_kv": vn,
            "type": ["b"] * len(vn),
            "in_service": [True] * len(vn),
        }
        links = [x for x in self.links if x[0] != x[1]]
        z = np.array([x[2] for x in links], complex)
        zero = np.zeros(len(links))
        self.columns["impedance"] = {
            "name": [str(k) for k in range(len(links))],
            "from_bus": [x[0] for x in links],
            "to_bus": [x[1] for x in links],
            "rft_pu": z.real,
            "xft_pu": z.imag,
            "rtf_pu": z.real,
            "xtf_pu": z.imag,
            "sn_mva": np.full(len(links), self.s_base),
            "in_service": [True] * len(links),
        } | dict.fromkeys(("gf_pu", "bf_pu", "gt_pu", "bt_pu"), zero)

    def at_places(self, values: FloatArray, start: int) -> FloatArray:
        """Return values of buses at each place, NaN where dead; the part's first bus is at `start`."""
        place = (self.fault.place_bus >= 0) & (self.bus_of[self.fault.plant.place_node] >= 0)
        out = np.full(len(place), np.nan)
        out[place] = values[start + self.bus_of[self.fault.plant.place_node[place]]]
        return out
