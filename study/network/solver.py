"""The reported load flow: the plant as a pandapower network, built once and switched from mode to mode.

The only module that imports pandapower, and only when a network is built. One `runpp` for each island.
A set is a PV generator on a bus of its own behind its compensating reactance. Sources under another law, or
held at a limit, stand as an EMF behind a reactance, adjusted until the law holds at the voltages found.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from typing import Any

import numpy as np
from numpy.typing import NDArray

from study.network.batch import solve_batch
from study.network.cases import Case, SolvedCase, agreement_of
from study.network.emfs import Emfs, emfs_of
from study.network.mode_tables import consumer_columns, mode_columns
from study.network.network import ModeNetwork, Network
from study.network.solution import Flows, assemble, solution_of, unsolved
from study.network.solver_empty import empty_network
from study.network.tables import fixed_tables, layout_of

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]
IntArray = NDArray[np.int64]

LAW_TOLERANCE = 1e-9  # of a source's law, at the voltages that pandapower finds
MOST_ADJUSTMENTS = 25
TOLERANCE_PU = 1e-10
FLOW_OPTIONS: dict[str, Any] = {
    "algorithm": "nr",
    "init": "flat",
    "max_iteration": 30,
    "calculate_voltage_angles": False,
    "trafo_model": "pi",
    "trafo3w_losses": "hv",
    "voltage_depend_loads": False,
    "enforce_q_lims": False,
    "check_connectivity": False,
    "lightsim2grid": False,
    "numba": False,
}


def solve_reported(network: Network, cases: Iterable[Case]) -> tuple[SolvedCase, ...]:
    """Solve cases with pandapower, each held against the vectorised solver.

    Parameters
    ----------
    network : Network
        Of the plant.
    cases : iterable of Case
        One for each mode, as a rule.

    Returns
    -------
    tuple of SolvedCase
        In the order given. A case without a solution says why; the others go on.
    """
    grid = _Grid(network)
    return tuple(_solve_case(grid, c) for c in cases)


def export_json(network: Network, one: Case) -> str:
    """Return a mode as pandapower JSON, every live island in service and switched as the mode has it.

    Parameters
    ----------
    network : Network
        Of the plant.
    one : Case
        The mode and its load.

    Returns
    -------
    str
        For `pandapower.from_json_string`.
    """
    import pandapower

    grid = _Grid(network)
    grid.switch(one)
    batch = solve_batch(one.at, one.p_kw, one.q_kvar)
    if batch.solved[0]:
        grid.set_sources(emfs_of(batch), np.arange(len(one.at.sources)))
    grid.put_in_service(one.at, np.flatnonzero(one.at.bus_of_node >= 0), np.arange(len(one.at.sources)))
    return str(pandapower.to_json(grid.net))


def _solve_case(grid: _Grid, one: Case) -> SolvedCase:
    at = one.at
    batch = solve_batch(at, one.p_kw, one.q_kvar)
    own = solution_of(batch, 0, one.p_kw, one.q_kvar)
    if not own.solved:
        return SolvedCase(reported=own, own=own, agreement=agreement_of(batch, None, own))
    grid.switch(one)
    emfs = emfs_of(batch)
    found = _Found(at)
    for island in range(at.structure.islands):
        reason = _solve_island(grid, emfs, island, found)
        if reason:
            lost = unsolved(at, f"{', '.join(at.view.islands[island].boards)}: {reason}", own.findings)
            return SolvedCase(reported=lost, own=own, agreement=agreement_of(batch, None, own))
    reported = assemble(
        batch,
        0,
        v_bus=found.v_bus,
        source_s_kva=np.asarray(found.source_s * at.network.s_base_kva),
        f_pu=emfs.frequency(found.source_s),
        flows=Flows(s_from_kva=found.branch_s_kva[0, at.live], s_to_kva=found.branch_s_kva[1, at.live]),
        load_s_kva=found.load_s_kva,
    )
    return SolvedCase(reported=reported, own=own, agreement=agreement_of(batch, reported, own))


def _solve_island(grid: _Grid, emfs: Emfs, island: int, found: _Found) -> str:
    """Solve one island, adjusting EMFs until every law holds; return why not, or an empty text."""
    at = emfs.at
    members = np.flatnonzero(at.structure.source_island == island)
    grid.put_in_service(at, np.flatnonzero(np.array(at.view.island) == island), members)
    last: tuple[FloatArray, FloatArray] | None = None
    error = np.zeros(0)
    for _ in range(MOST_ADJUSTMENTS):
        grid.set_sources(emfs, members)
        if not grid.run(distributed=int((emfs.weight[members] != 0.0).sum()) > 1):
            return "pandapower finds no operating point (not converged after 30 iterations)."
        found.take(grid, emfs, island)
        error = emfs.law_error(found.v_bus, found.source_s, members)
        if np.all(np.abs(error) <= LAW_TOLERANCE):
            break
        last = emfs.adjust(members, error, last)
    else:
        return f"the sources' voltage laws did not settle (largest error {np.abs(error).max():.1e} pu)."
    if np.abs(emfs.power_error(found.source_s, members)).max() > LAW_TOLERANCE:
        return "the division of active power does not follow the governors' laws."
    return ""


class _Found:
    """What the islands' load flows gave, gathered over the islands of a mode."""

    def __init__(self, at: ModeNetwork) -> None:
        self.v_bus: ComplexArray = np.full(at.structure.all_buses, np.nan, complex)
        self.source_s: ComplexArray = np.full(len(at.sources), np.nan, complex)
        self.load_s_kva = np.zeros(len(at.network.plant.loads), complex)
        self.branch_s_kva = np.zeros((2, len(at.network.topology.branches)), complex)

    def take(self, grid: _Grid, emfs: Emfs, island: int) -> None:
        """Copy an island's results out of pandapower's tables."""
        at = emfs.at
        # Star points of three-winding transformers have no bus in pandapower's tables: it makes its own.
        nodes = np.flatnonzero(np.array(at.view.island) == island)
        self.v_bus[at.bus_of_node[nodes]] = grid.voltages(nodes)
        members = np.flatnonzero(at.structure.source_island == island)
        self.source_s[members] = grid.source_power(emfs, members)
        fed = np.flatnonzero((at.load_bus >= 0) & np.isin(np.array(at.view.load_node), nodes))
        self.load_s_kva[fed] = grid.load_power(fed)
        live = np.zeros(self.branch_s_kva.shape[1], bool)
        live[at.live] = np.isin(at.network.branches.from_node[at.live], nodes)
        grid.copy_branch_power(self.branch_s_kva, live)


class _Grid:
    """A pandapower network of the whole plant, and the rows of its tables."""

    def __init__(self, network: Network) -> None:
        import pandas as pd

        self.network, self.layout = network, layout_of(network)
        self.net = empty_network(network.plant.project.f_rated_hz, network.s_base_kva)
        for table, columns in fixed_tables(network, self.layout).items():
            dtypes, count = self.net[table].dtypes, len(columns["name"])
            self.net[table] = pd.DataFrame(
                {c: _typed(columns.get(c), count, dtype) for c, dtype in dtypes.items()}, index=range(count)
            )

    def _write(self, columns: Mapping[tuple[str, str], NDArray[Any]], after: int = 0) -> None:
        """Write columns, or as many of their rows as are given, from row `after` on.

        What stands there already is left alone: that is much quicker than writing it again.
        """
        for (table, column), values in columns.items():
            frame = self.net[table]
            old = frame[column].to_numpy()
            rows = slice(after, after + len(values))
            if not np.array_equal(old[rows], values):
                whole = old.copy()
                whole[rows] = values
                frame[column] = whole

    def switch(self, one: Case) -> None:
        """Set what the mode switches and what its consumers ask for."""
        self._write(mode_columns(one.at, self.layout))
        self._write(consumer_columns(one.at, self.layout, one.p_kw, one.q_kvar))

    def set_sources(self, emfs: Emfs, members: IntArray) -> None:
        """Set EMF, reactance, base point and part in the slack; only `members` are in service."""
        s_base = self.net.sn_mva
        rows = self._rows(emfs.at)
        count = len(self.layout.source_names)
        behind = (emfs.x != 0.0) | (emfs.r != 0.0)
        here = np.isin(np.arange(len(rows)), members)

        def spread(values: NDArray[Any], otherwise: float | bool) -> NDArray[Any]:
            out = np.full(count, otherwise, values.dtype)
            out[rows] = values
            return out

        e, r, x = spread(emfs.e, 1.0), spread(emfs.r, 0.0), spread(emfs.x, 0.0)
        p, q = spread(emfs.p * s_base, 0.0), spread(emfs.q * s_base, 0.0)
        self._write(
            {
                ("gen", "in_service"): spread(here & ~emfs.fixed & ~emfs.grid, False),
                ("gen", "vm_pu"): e,
                ("gen", "p_mw"): p,
                ("gen", "slack"): spread(emfs.weight != 0.0, False),
                ("gen", "slack_weight"): spread(emfs.weight, 0.0),
                ("ext_grid", "in_service"): spread(here & emfs.grid, False),
                ("ext_grid", "vm_pu"): e,
                ("sgen", "in_service"): spread(here & emfs.fixed, False),
                ("sgen", "p_mw"): p,
                ("sgen", "q_mvar"): q,
            }
        )
        reactances = {("impedance", "rft_pu"): r, ("impedance", "xft_pu"): x}
        reactances |= {("impedance", "rtf_pu"): r, ("impedance", "xtf_pu"): x}
        joined = {("impedance", "in_service"): spread(behind & ~emfs.fixed, False)}
        self._write(reactances | joined, after=len(self.layout.impedance))
        self._write({("switch", "closed"): spread(~behind & ~emfs.fixed, False)}, after=len(self.layout.tie))

    def _rows(self, at: ModeNetwork) -> IntArray:
        return np.array([self.layout.source_row(s.name) for s in at.sources], np.int64)

    def put_in_service(self, at: ModeNetwork, nodes: IntArray, members: IntArray) -> None:
        """Leave only the buses of an island in service."""
        in_service = np.zeros(len(self.net.bus), bool)
        in_service[nodes] = True
        in_service[[k for k, n in enumerate(self.network.topology.nodes) if n.kind == "star"]] = False
        in_service[self.layout.nodes + self._rows(at)[members]] = True
        self.net.bus["in_service"] = in_service
        # pandapower makes the star points itself, and leaves those of dead transformers standing alone.
        closed = np.array(at.view.closed, bool)[self.layout.trafo3w]
        hv_bus = self.network.branches.from_node[self.layout.trafo3w]
        self.net.trafo3w["in_service"] = closed & in_service[hv_bus]

    def run(self, distributed: bool) -> bool:
        """Run the load flow; False where it does not converge."""
        from pandapower import LoadflowNotConverged, runpp

        tolerance = TOLERANCE_PU * self.net.sn_mva
        try:
            runpp(self.net, distributed_slack=distributed, tolerance_mva=tolerance, **FLOW_OPTIONS)
        except LoadflowNotConverged:
            return False
        return True

    def voltages(self, nodes: IntArray) -> ComplexArray:
        """Return the complex voltages of nodes, per unit."""
        frame = self.net.res_bus
        angle = np.deg2rad(frame["va_degree"].to_numpy()[nodes])
        return np.asarray(frame["vm_pu"].to_numpy()[nodes] * np.exp(1j * angle))

    def source_power(self, emfs: Emfs, members: IntArray) -> ComplexArray:
        """Return what sources deliver at their terminals, per unit."""
        rows = self._rows(emfs.at)[members]
        through = self._complex("impedance", "p_to_mw", "q_to_mvar")[len(self.layout.impedance) :][rows]
        behind = (emfs.x != 0.0) | (emfs.r != 0.0)
        out = -through
        for table, own in (
            ("gen", ~behind & ~emfs.grid & ~emfs.fixed),
            ("ext_grid", ~behind & emfs.grid),
            ("sgen", emfs.fixed),
        ):
            direct = own[members]
            if direct.any():
                out[direct] = self._complex(table, "p_mw", "q_mvar")[rows[direct]]
        return np.asarray(out / self.net.sn_mva, complex)

    def load_power(self, loads: IntArray) -> ComplexArray:
        """Return what consumers draw, in kVA."""
        both = self._complex("load", "p_mw", "q_mvar")[loads], self._complex("shunt", "p_mw", "q_mvar")[loads]
        return 1000.0 * (np.nan_to_num(both[0]) + np.nan_to_num(both[1]))

    def copy_branch_power(self, into: ComplexArray, live: NDArray[np.bool_]) -> None:
        """Copy the power into both ends of live branches, [end, branch], in kVA."""
        for table, places, ends in (
            ("impedance", self.layout.impedance, ("from", "to")),
            ("trafo", self.layout.trafo, ("hv", "lv")),
        ):
            here = live[places]
            for end, side in enumerate(ends):
                power = self._complex(table, f"p_{side}_mw", f"q_{side}_mvar")[: len(places)]
                into[end, places[here]] = 1000.0 * power[here]
        for n, place in enumerate(self.layout.trafo3w):
            for leg, side in enumerate(("hv", "mv", "lv")):
                if live[place + leg]:
                    power = self._complex("trafo3w", f"p_{side}_mw", f"q_{side}_mvar")[n]
                    into[0 if leg == 0 else 1, place + leg] = 1000.0 * power

    def _complex(self, table: str, p: str, q: str) -> ComplexArray:
        frame = self.net[f"res_{table}"]
        return np.asarray(frame[p].to_numpy() + 1j * frame[q].to_numpy())


def _typed(values: NDArray[Any] | None, count: int, dtype: Any) -> NDArray[Any]:
    """Return a column of the library's type; one that is not given is NaN, or True if it is a yes or no."""
    if values is None:
        return np.ones(count, bool) if dtype.kind == "b" else np.full(count, np.nan)
    return values.astype(dtype)
