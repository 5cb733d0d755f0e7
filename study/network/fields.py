"""Field needed and available of all sets at once: the formulas' elementwise forms on stacked machine data."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from study.formulas.excitation import FieldSupply, available_field
from study.formulas.saturation import SaturationCurve
from study.formulas.synchronous import Machine, field_required
from study.network.sources import Source

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]
IntArray = NDArray[np.int64]
BoolArray = NDArray[np.bool_]


@dataclass(frozen=True, slots=True, kw_only=True)
class SetGroup:
    """Sets whose saturation is of one kind; their data are columns [set, 1] in place of single numbers."""

    members: IntArray
    machine: Machine
    ceiling: FieldSupply
    rated: FloatArray


@dataclass(frozen=True, slots=True, kw_only=True)
class FieldState:
    """Field at a point, [source, scenario], as multiples of the field at rated load; NaN without a machine.

    ``in_step`` is False past a quarter turn of load angle, where the field pushes the rotor out of step.
    """

    needed: FloatArray
    most: FloatArray
    in_step: BoolArray


def set_groups(sources: Sequence[Source]) -> tuple[SetGroup, ...]:
    """Return the sources that have a machine, by kind of saturation.

    Parameters
    ----------
    sources : sequence of Source
        Sources on line.

    Returns
    -------
    tuple of SetGroup
        Each source with a machine in one of them.
    """
    kinds: dict[str, list[int]] = {}
    for n, s in enumerate(sources):
        if s.machine is not None:
            kinds.setdefault(s.machine.saturation.kind, []).append(n)
    return tuple(_group([sources[n] for n in members], members) for members in kinds.values())


def _group(sources: Sequence[Source], members: list[int]) -> SetGroup:
    machines = [s.machine for s in sources if s.machine is not None]
    curves = [m.saturation for m in machines]
    curve = SaturationCurve(kind=curves[0].kind, a=_column(curves, "a"), b=_column(curves, "b"))
    names = ("xd_pu", "xq_pu", "xd_transient_pu", "ra_pu")
    parts = ("constant_pu", "voltage_gain", "current_gain")
    ceilings = [s.ceiling for s in sources]
    return SetGroup(
        members=np.array(members, np.int64),
        machine=Machine(**{n: _column(machines, n) for n in names}, saturation=curve),
        ceiling=FieldSupply(**{n: _column(ceilings, n) for n in parts}),
        rated=_column(sources, "rated_field_pu"),
    )


def _column(items: Sequence[Any], name: str) -> Any:
    return np.array([getattr(item, name) for item in items], float)[:, None]


def field_state(groups: tuple[SetGroup, ...], v: FloatArray, i: FloatArray, phi: FloatArray) -> FieldState:
    """Return the field of every set at a point.

    Parameters
    ----------
    groups : tuple of SetGroup
        From `set_groups`.
    v, i : ndarray, shape (source, scenario)
        Terminal voltage and current. [pu of the source's own rating]
    phi : ndarray, shape (source, scenario)
        Angle of lag. [rad]

    Returns
    -------
    FieldState
        NaN where a source has no machine.
    """
    needed, most = np.full(v.shape, np.nan), np.full(v.shape, np.nan)
    in_step = np.ones(v.shape, bool)
    for group in groups:
        k = group.members
        v_k, i_k, phi_k = v[k], i[k], phi[k]
        needed[k] = field_required(v_k, i_k, phi_k, group.machine) / group.rated
        most[k] = available_field(v_k, i_k, phi_k, group.ceiling) / group.rated
        along = group.machine.ra_pu * np.cos(phi_k) + group.machine.xq_pu * np.sin(phi_k)
        in_step[k] = v_k + along * i_k >= 0.0
    return FieldState(needed=needed, most=most, in_step=in_step)
