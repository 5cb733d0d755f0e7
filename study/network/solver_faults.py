"""The fault network as a pandapower network, and its IEC 60909 currents beside ours.

Every set, motor and supply has a bus of its own, behind its real cable or 10 nanoohm; boards joined by ties
without impedance are one bus. Converter supplies are left out: the comparison is of the impedances.
"""

from __future__ import annotations

import logging
import warnings
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from study.formulas.fault_iec60909 import LvTolerance
from study.formulas.fault_iec60909_equipment import generator_fictitious_resistance_ohm
from study.model.branches import ThreeWindingTransformer, Transformer
from study.model.sources import Genset, SynchronousMotor
from study.network.fault_network import FaultNetwork
from study.network.fault_supplies import Supply
from study.network.fault_tables import (
    generator_columns,
    motor_columns,
    shore_columns,
    three_winding_columns,
    two_winding_columns,
)
from study.network.solver_empty import empty_network

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]

_TABLES = ("bus", "impedance", "trafo", "trafo3w", "gen", "ext_grid", "motor")
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
    """Return pandapower's IEC 60909 currents of cases, mode by mode.

    Its generators have one resistance for all currents, so each case is run twice: with the real one for
    I''k, and with the fictitious one for kappa.

    Parameters
    ----------
    nets : sequence of FaultNetwork
        Networks of the ship method; all of one plant.
    lv_tolerance_percent : {6, 10}
        Chooses the voltage factors.
    all_places : bool
        Also at consumers' terminals without a motor, where only a series impedance is added, and the
        two-phase fault; the matrices that the library inverts are then many times larger.

    Returns
    -------
    tuple of LibraryCurrents
        At the voltage of each place, in the order given.
    """
    if not nets:
        return ()
    network = nets[0].plant.network
    template = empty_network(network.plant.project.f_rated_hz, network.s_base_kva)
    blank = {name: template[name] for name in _TABLES}
    log = logging.getLogger("pandapower.shortcircuit.calc_sc")
    level = log.level
    log.setLevel(logging.ERROR)  # it warns of every network with a generator
    try:
        grids = (
            _Grid(template, blank, x, all_places=all_places, tolerance=lv_tolerance_percent) for x in nets
        )
        return tuple(_currents(grid) for grid in grids)
    finally:
        log.setLevel(level)


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
    network = net.plant.network
    blank = empty_network(network.plant.project.f_rated_hz, network.s_base_kva)
    grid = _Grid(blank, {}, net, all_places=all_places, tolerance=lv_tolerance_percent)
    grid.set_resistance(fictitious=False)
    return grid.net


def _currents(grid: _Grid) -> LibraryCurrents:
    from pandapower.shortcircuit import calc_sc

    case = "max" if grid.fault.options.maximum else "min"
    options: dict[str, Any] = {"case": case, "lv_tol_percent": grid.tolerance}
    if not grid.feeds:
        nothing = np.full(len(grid.fault.place_bus), np.nan)
        return LibraryCurrents(ik_3ph_a=nothing, ik_2ph_a=nothing, ip_3ph_a=nothing)
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        grid.set_resistance(fictitious=True)
        calc_sc(grid.net, fault="3ph", ip=True, kappa_method="C", topology="meshed", **options)
        kappa = grid.result("ip_ka") / grid.result("ikss_ka")
        grid.set_resistance(fictitious=False)
        calc_sc(grid.net, fault="3ph", **options)
        three = grid.result("ikss_ka")
        two = np.full_like(three, np.nan)
        if grid.all_places:
            calc_sc(grid.net, fault="2ph", **options)
            two = grid.result("ikss_ka")
    return LibraryCurrents(ik_3ph_a=three, ik_2ph_a=two, ip_3ph_a=kappa * three)


class _Grid:
    """A pandapower network of one mode and case."""

    def __init__(
        self,
        template: Any,
        blank: Mapping[str, Any],
        net: FaultNetwork,
        *,
        all_places: bool,
        tolerance: LvTolerance,
    ) -> None:
        self.fault, self.net, self.all_places, self.tolerance = net, template, all_places, tolerance
        network = net.plant.network
        self.s_base = network.s_base_kva / 1000.0
        for name, table in blank.items():
            self.net[name] = table
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

    def _put(self, table: str, columns: dict[str, Any]) -> None:
        import pandas as pd

        empty = self.net[table]
        count = len(next(iter(columns.values())))
        frame = pd.DataFrame(columns, index=range(count))
        for name, dtype in empty.dtypes.items():
            if name in columns:
                frame[name] = frame[name].astype(dtype)
            else:
                frame[name] = np.nan if dtype.kind == "f" else pd.Series([None] * count, dtype=object)
        self.net[table] = frame

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
            self._put("trafo", two_winding_columns(two))
        if three:
            self._put("trafo3w", three_winding_columns(net, three, self.tolerance))

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
            self._put("gen", generator_columns(items, self.gen_bus))
        if shores:
            self._put("ext_grid", shore_columns(shores, self.s_base))
        if motors:
            u_v = [float(self.fault.plant.network.u_base_v[s.node]) for _, _, s in motors]
            self._put("motor", motor_columns(motors, u_v, self.s_base))

    def _beside(self, s: Supply) -> int:
        board = int(self.bus_of[s.node])
        vn = float(self.vn[board])
        bus = self._new_bus(vn)
        self.links.append((board, bus, 1j * LINK_OHM * self.s_base / vn**2))
        return bus

    def set_resistance(self, *, fictitious: bool) -> None:
        """Set the generators' resistance, real or fictitious."""
        values = []
        for s in self.gens:
            item = s.item
            assert isinstance(item, Genset | SynchronousMotor)
            base = item.u_rated_v**2 / (1000.0 * item.s_rated_kva)
            x = item.machine.x_d2_saturated_pu * base
            own = item.machine.r_stator_pu * base
            assumed = float(generator_fictitious_resistance_ohm(x, item.u_rated_v, 1000.0 * item.s_rated_kva))
            values.append(assumed if fictitious else own)
        if values:
            self.net.gen["rdss_ohm"] = values

    def _fill_buses(self) -> None:
        vn = np.concatenate([self.vn, self.extra_vn])
        self._put(
            "bus",
            {
                "name": [str(k) for k in range(len(vn))],
                "vn_kv": vn,
                "type": ["b"] * len(vn),
                "in_service": [True] * len(vn),
            },
        )
        links = [x for x in self.links if x[0] != x[1]]
        z = np.array([x[2] for x in links], complex)
        self._put(
            "impedance",
            {
                "name": [str(k) for k in range(len(links))],
                "from_bus": [x[0] for x in links],
                "to_bus": [x[1] for x in links],
                "rft_pu": z.real,
                "xft_pu": z.imag,
                "rtf_pu": z.real,
                "xtf_pu": z.imag,
                "gf_pu": np.zeros(len(links)),
                "bf_pu": np.zeros(len(links)),
                "gt_pu": np.zeros(len(links)),
                "bt_pu": np.zeros(len(links)),
                "sn_mva": np.full(len(links), self.s_base),
                "in_service": [True] * len(links),
            },
        )

    def result(self, column: str) -> FloatArray:
        """Return a column of the results in A at each place; NaN where dead."""
        place = (self.fault.place_bus >= 0) & (self.bus_of[self.fault.plant.place_node] >= 0)
        out = np.full(len(place), np.nan)
        node = self.fault.plant.place_node[place]
        found = self.net.res_bus_sc[column].reindex(range(self.count)).to_numpy()
        out[place] = 1000.0 * found[self.bus_of[node]]
        return out
