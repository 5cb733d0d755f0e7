"""The plant's circuit in volts, ohms and amperes, written straight from the sheets' numbers.

Shares no code with the network room but the list of what is closed: impedances, ratios and laws are
worked out again here, so that a solution can be put into Kirchhoff's current law at every node.
"""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from study.formulas.cables import conductor_resistance, skin_effect_factor, typical_reactance
from study.model.branches import Cable, ThreeWindingTransformer, Transformer
from study.network.solution import ModeSolution
from study.network.topology import Branch

SHARE = {"motor": 1.0, "converter": 1.0, "heating": 0.0, "lighting": 0.0, "general": 0.5}
ROOT3 = 3.0**0.5


def current_mismatch(s: ModeSolution, p_kw: np.ndarray, q_kvar: np.ndarray) -> tuple[float, float]:
    """Return the largest sum of line currents at any board or terminal, and the largest line current [A].

    Boards joined by closed ties without impedance count as one.
    """
    at, topology, root = s.at, s.at.network.topology, np.array(s.at.view.bus)
    u_base = np.array([n.u_base_v for n in topology.nodes])
    volts = s.node_v_pu * u_base / ROOT3  # line to neutral
    total = np.zeros(len(root), complex)
    largest = 0.0

    for node, ampere in _all_currents(s, volts, p_kw, q_kvar):
        total[root[node]] += ampere
        largest = max(largest, abs(ampere))
    alive = np.array(at.view.island) >= 0
    star = np.array([n.kind == "star" for n in topology.nodes])
    return float(np.abs(total[alive & ~star]).max()), largest


def _all_currents(
    s: ModeSolution, volts: np.ndarray, p_kw: np.ndarray, q_kvar: np.ndarray
) -> Iterator[tuple[int, complex]]:
    """Yield every current into a node, ties without impedance left out."""
    at, plant, topology = s.at, s.at.network.plant, s.at.network.topology
    for source, power in zip(at.sources, s.source_s_kva, strict=True):
        yield source.node, np.conj(1000.0 * power / (3.0 * volts[source.node]))
    for k in np.flatnonzero(at.view.load_fed):
        yield at.view.load_node[k], -_load_current(s, int(k), complex(p_kw[k], q_kvar[k]), volts)
    for motor, power in zip(plant.synchronous_motors, at.motor_kva, strict=True):
        node = topology.node_of[motor.name]
        if power:
            yield node, -np.conj(1000.0 * power / (3.0 * volts[node]))
    for item, node in zip(plant.filters, topology.filter_node, strict=True):
        if at.mode.is_on(item.name) and at.view.island[node] >= 0:
            yield node, -volts[node] * _filter_siemens(item, float(at.order[at.view.island[node]]))
    for branch in _live(s):
        yield from ((node, -ampere) for node, ampere in _branch_currents(s, branch, volts))
    for t in plant.three_winding:
        yield from ((node, -ampere) for node, ampere in _three_winding_currents(s, t, volts))


def _load_current(s: ModeSolution, k: int, asked_kva: complex, volts: np.ndarray) -> complex:
    load, node = s.at.network.plant.loads[k], s.at.view.load_node[k]
    line = load.u_rated_v
    if load.phases == 1 and abs(line * ROOT3 / s.at.network.u_base_v[node] - 1.0) < 0.15:
        line *= ROOT3
    ratio = abs(volts[node]) * ROOT3 / line
    share = SHARE[load.kind]
    power = asked_kva * (share + (1.0 - share) * ratio**2)
    return np.conj(1000.0 * power / (3.0 * volts[node]))


def _live(s: ModeSolution) -> Iterator[Branch]:
    for k in s.at.live:
        branch = s.at.network.topology.branches[k]
        if not branch.winding:
            yield branch


def _order(s: ModeSolution, branch: Branch) -> float:
    """Return frequency over rated: that of the shore supply, where one holds the island."""
    island = s.at.view.island[branch.from_node]
    f_rated = s.at.network.plant.project.f_rated_hz
    names = s.at.view.islands[island].sources
    shore = [x.f_hz / f_rated for x in s.at.network.plant.shore_supplies if x.name in names]
    return shore[0] if shore else 1.0


def _branch_currents(s: ModeSolution, branch: Branch, volts: np.ndarray) -> Iterator[tuple[int, complex]]:
    """Yield the current into the branch at each end."""
    plant, h = s.at.network.plant, _order(s, branch)
    a, b = branch.from_node, branch.to_node
    match branch.kind:
        case "cable":
            z, siemens = _cable_ohm(s, plant.cables[branch.index], branch, h)
            through = (volts[a] - volts[b]) / z
            yield a, through + 0.5 * siemens * volts[a]
            yield b, -through + 0.5 * siemens * volts[b]
        case "tie" | "reactor":
            item = plant.ties[branch.index] if branch.kind == "tie" else plant.reactors[branch.index]
            through = (volts[a] - volts[b]) / complex(item.r_ohm, h * item.x_ohm)
            yield a, through
            yield b, -through
        case "transformer":
            t = plant.transformers[branch.index]
            turns, z, iron = _transformer_ohm(s, t, h)
            inside = volts[a] / turns  # primary voltage seen from the secondary
            through = (inside - volts[b]) / z
            yield a, (through + 0.5 * iron * inside) / turns
            yield b, -through + 0.5 * iron * volts[b]


def _cable_ohm(s: ModeSolution, cable: Cable, branch: Branch, h: float) -> tuple[complex, complex]:
    f = s.at.network.plant.project.f_rated_hz
    zero = {"copper": 234.5, "aluminium": 228.0}[cable.conductor]
    r20 = cable.resistance_ohm_per_km or conductor_resistance(
        cable.section_mm2, cable.conductor, cable.conductor_class, cable.tinned
    )
    r = r20 * (zero + cable.conductor_temperature_degc) / (zero + 20.0)
    r *= float(skin_effect_factor(r, f))
    x = cable.reactance_ohm_per_km or typical_reactance(cable.section_mm2, cable.cores, f)
    loads = {x.name: x for x in s.at.network.plant.loads}
    runs, factor = float(cable.runs), 1.0
    if branch.load:
        load, demand = loads[branch.load], s.at.mode.demand.get(branch.load)
        runs *= demand.in_use if demand is not None and demand.in_use > 0 else 1.0
        u = s.at.network.topology.nodes[branch.to_node].u_base_v
        if load.phases != 3:
            neutral = load.phases == 1 and abs(load.u_rated_v * ROOT3 / u - 1.0) < 0.15
            factor = 6.0 if neutral else 2.0
    km = cable.length_m / 1000.0
    farad = (cable.capacitance_uf_per_km or 0.0) * 1e-6 * km * runs
    return complex(r, h * x) * km * factor / runs, 1j * 2.0 * np.pi * h * f * farad


def _tap(s: ModeSolution, name: str, own: float) -> float:
    point = s.at.mode.set_points.get(name)
    return own if point is None or point.tap_pu is None else point.tap_pu


def _transformer_ohm(s: ModeSolution, t: Transformer, h: float) -> tuple[float, complex, float]:
    """Return the turns ratio, series impedance and iron conductance seen from the secondary."""
    ohm = t.u_secondary_v**2 / (1000.0 * t.s_rated_kva)
    r = t.copper_loss_kw / t.s_rated_kva
    x = np.sqrt(t.u_k_pu**2 - r**2)
    turns = t.u_primary_v * (1.0 + _tap(s, t.name, t.tap_pu)) / t.u_secondary_v
    iron = t.units * 1000.0 * t.iron_loss_kw / t.u_secondary_v**2
    return turns, complex(r, h * x) * ohm / t.units, iron


def _three_winding_currents(
    s: ModeSolution, t: ThreeWindingTransformer, volts: np.ndarray
) -> Iterator[tuple[int, complex]]:
    """Yield the currents into the windings; the star point is eliminated, its voltage is not looked at."""
    branches = s.at.network.topology.branches
    legs = [branches[k] for k in s.at.live if branches[k].name == t.name]
    if not legs:
        return
    h = _order(s, legs[0])
    kva = {"ps": (t.s_primary_kva, t.s_secondary_kva), "pt": (t.s_primary_kva, t.s_tertiary_kva)}
    kva["st"] = (t.s_secondary_kva, t.s_tertiary_kva)
    given = {
        "ps": (t.u_k_primary_secondary_pu, t.copper_loss_primary_secondary_kw),
        "pt": (t.u_k_primary_tertiary_pu, t.copper_loss_primary_tertiary_kw),
        "st": (t.u_k_secondary_tertiary_pu, t.copper_loss_secondary_tertiary_kw),
    }
    z = {}
    for pair, (u_k, loss) in given.items():
        base = min(kva[pair])
        r = loss / base
        x = np.sqrt(u_k**2 - r**2)
        z[pair] = complex(r, h * x) * t.u_primary_v**2 / (1000.0 * base)  # on the primary side
    star = {
        "primary": (z["ps"] + z["pt"] - z["st"]) / 2.0,
        "secondary": (z["ps"] + z["st"] - z["pt"]) / 2.0,
        "tertiary": (z["pt"] + z["st"] - z["ps"]) / 2.0,
    }
    turns = {
        "primary": 1.0 + _tap(s, t.name, t.tap_pu),
        "secondary": t.u_secondary_v / t.u_primary_v,
        "tertiary": t.u_tertiary_v / t.u_primary_v,
    }
    iron = 1000.0 * t.iron_loss_kw / t.u_primary_v**2
    node = {b.winding: b.from_node if b.winding == "primary" else b.to_node for b in legs}
    inside = {w: volts[n] / turns[w] for w, n in node.items()}
    admittance = sum(1.0 / star[w] for w in node) + 0.5 * iron * ("primary" in node)
    centre = sum(inside[w] / star[w] for w in node) / admittance
    for w, n in node.items():
        shunt = 0.5 * iron * inside[w] if w == "primary" else 0.0
        yield n, ((inside[w] - centre) / star[w] + shunt) / turns[w]


def _filter_siemens(item: object, h: float) -> complex:
    b = 1000.0 * item.q_rated_kvar / item.u_rated_v**2  # type: ignore[attr-defined]
    if item.kind == "capacitor":  # type: ignore[attr-defined]
        return 1j * h * b
    n, quality = item.tuning_order, item.quality  # type: ignore[attr-defined]
    x_c = n * n / (n * n - 1.0) / b
    x_l = x_c / n**2
    if item.kind == "tuned":  # type: ignore[attr-defined]
        return 1.0 / complex(n * x_l / quality, h * x_l - x_c / h)
    r = quality * n * x_l
    return 1.0 / (r * 1j * h * x_l / (r + 1j * h * x_l) - 1j * x_c / h)
