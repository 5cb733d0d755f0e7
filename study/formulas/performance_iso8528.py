"""Performance classes of generating sets: the strictest whose transient figures an event keeps."""

from __future__ import annotations

from typing import Literal

from study.formulas.table_files import table_rows

Quantity = Literal["voltage", "frequency"]
CLASSES = ("G3", "G2", "G1")


def performance_class(
    quantity: Quantity,
    *,
    load_on: bool,
    deviation_pu: float,
    recovery_s: float,
    speed_droop_pu: float = 0.0,
) -> str:
    """Return the strictest class that a transient deviation and its recovery time keep.

    Source: ISO 8528-5:2018, table 4 (transient voltage and frequency deviation, recovery times); from memory.

    Parameters
    ----------
    quantity : str
        ``voltage`` or ``frequency``.
    load_on : bool
        True for a sudden increase of load, False for a decrease.
    deviation_pu : float
        Largest deviation from the value before, as a magnitude. [pu of rated]
    recovery_s : float
        Until the quantity is back in its band. [s]
    speed_droop_pu : float
        Frequency droop of the set, which a dip from the initial frequency may hold besides. [pu]

    Returns
    -------
    str
        ``G3``, ``G2``, ``G1`` or ``none``.

    Examples
    --------
    >>> performance_class("voltage", load_on=True, deviation_pu=0.17, recovery_s=1.2)
    'G2'
    """
    way, end = ("dip", "on_s") if load_on else ("rise", "off_s")
    rows = {row["class"]: row for row in table_rows("performance_iso8528_5")}
    droop = speed_droop_pu if quantity == "frequency" and load_on else 0.0
    for name in CLASSES:
        most = float(rows[name][f"{quantity}_{way}"]) / 100.0 + droop
        if deviation_pu <= most and recovery_s <= float(rows[name][f"{quantity}_{end}"]):
            return name
    return "none"
