"""The largest motor that a board with sets can start, by method: by the dip allowed, and by the engines."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache

import numpy as np

from study.analyses.dips_options import DipOptions
from study.formulas.induction import typical_efficiency, typical_power_factor, typical_starting_data
from study.network.batch import BatchSolution
from study.network.start_network import start_network
from study.results.arrays import FloatArray, read_only
from study.results.dips import START_METHODS, LargestStart

GRID_KW = np.geomspace(0.2, 20_000.0, 240)
USUAL_TAP, USUAL_LIMIT = 0.65, 3.5  # of an autotransformer, and x In of a soft starter; common practice
EFFICIENCY_KW = (0.75, 1000.0)


@dataclass(frozen=True, slots=True, kw_only=True)
class _Usual:
    """Usual cage motors over their rating, [rating]: starting kVA and power factor by one method."""

    s_kva: FloatArray
    cos_phi: FloatArray


def largest_starts(
    batch: BatchSolution, load: tuple[FloatArray, FloatArray], options: DipOptions
) -> list[LargestStart]:
    """Return the largest start of every board with sets on line.

    A usual cage motor of four poles (`formulas.induction`) stands on the board itself; the dip is the fall of
    the board's voltage behind X'd with every consumer an impedance.

    Parameters
    ----------
    batch : BatchSolution
        The mode solved.
    load : tuple of ndarray, shape (load,)
        kW and kvar that it was solved for.
    options : DipOptions
        Dip allowed.

    Returns
    -------
    list of LargestStart
        In the order of the boards.
    """
    at, plant = batch.at, batch.at.network.plant
    names = [b.name for b in plant.boards]
    homes = {
        names.index(at.network.topology.nodes[s.node].board): s.island
        for s in at.sources
        if s.machine is not None
    }
    boards = sorted(homes)
    if not boards:
        return []
    bus = np.array([at.bus_of_node[b] for b in boards], np.int64)
    net = start_network(batch, load, bus, first_cycle=False)
    out = []
    for n, b in enumerate(boards):
        nominal = plant.boards[b].u_nominal_v
        # kVA at the board's nominal voltage for 1 pu of admittance.
        scale = at.network.s_base_kva * (nominal / float(at.network.u_base_v[b])) ** 2
        by_dip, by_engine = [], []
        spare = _spare_kw(batch, homes[b])
        for method in START_METHODS:
            usual = _usual(method, plant.project.f_rated_hz)
            y = admittance_for_dip(complex(net.z[bus[n], n]), usual.cos_phi, options.dip_allowed_pu)
            by_dip.append(_crossing(usual.s_kva - y * scale))
            u = (1.0 - options.dip_allowed_pu) * abs(net.v[bus[n]]) * float(at.network.u_base_v[b]) / nominal
            by_engine.append(_crossing(usual.s_kva * usual.cos_phi * u * u - spare))
        out.append(
            LargestStart(
                mode=at.mode.name,
                board=plant.boards[b].name,
                dip_allowed_pu=options.dip_allowed_pu,
                p_rated_kw=read_only(by_dip),
                p_engine_kw=read_only(by_engine),
            )
        )
    return out


def admittance_for_dip(z: complex, cos_phi: FloatArray, dip_pu: float) -> FloatArray:
    """Return the admittance of a given power factor that lowers the voltage behind an impedance by a part.

    ``|1 + Z Y| = 1/(1 - dip)``, a quadratic in ``|Y|``.

    Parameters
    ----------
    z : complex
        What the network shows. [pu]
    cos_phi : ndarray
        Power factor of the start, lagging.
    dip_pu : float
        Fall over the voltage before.

    Returns
    -------
    ndarray
        Magnitude. [pu]
    """
    turned = z * np.exp(-1j * np.arccos(cos_phi))
    a, square = turned.real, abs(z) ** 2
    rest = 1.0 / (1.0 - dip_pu) ** 2 - 1.0
    return np.asarray((-a + np.sqrt(a * a + square * rest)) / square)


def _spare_kw(batch: BatchSolution, island: int) -> float:
    """Return what the engines of an island can give at once beyond what they give."""
    sets = [n for n, s in enumerate(batch.at.sources) if s.island == island and s.machine is not None]
    most = sum(batch.at.sources[n].p_max_kw for n in sets)
    return float(most - batch.source_p_kw[0, sets].sum())


@cache
def _usual(method: str, f_hz: float) -> _Usual:
    hz = 50.0 if f_hz < 55.0 else 60.0
    s, cos_phi = np.empty(len(GRID_KW)), np.empty(len(GRID_KW))
    for n, p in enumerate(GRID_KW.tolist()):
        start = typical_starting_data(p)
        efficiency = typical_efficiency(float(np.clip(p, *EFFICIENCY_KW)), "IE2", hz)
        k = {
            "direct": 1.0,
            "star-delta": 1.0 / 3.0,
            "autotransformer": USUAL_TAP**2,
            "soft starter": min(USUAL_LIMIT / start.starting_current, 1.0),
        }[method]
        s[n] = p / (efficiency * typical_power_factor(p, 4)) * start.starting_current * k
        cos_phi[n] = start.starting_cos_phi * (k if method == "soft starter" else 1.0)
    return _Usual(s_kva=s, cos_phi=cos_phi)


def _crossing(excess: FloatArray) -> float:
    """Return the rating at which an excess over the ratings' grid passes zero; 0 where all is too much."""
    over = np.flatnonzero(excess > 0.0)
    if not len(over):
        return float(GRID_KW[-1])
    n = int(over[0])
    if n == 0:
        return 0.0
    share = -excess[n - 1] / (excess[n] - excess[n - 1])
    return float(GRID_KW[n - 1] * (GRID_KW[n] / GRID_KW[n - 1]) ** share)
