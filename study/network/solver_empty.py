"""An empty pandapower network, made column by column: the library's own takes 0.2 s to cast nothing."""

from __future__ import annotations

from typing import Any

import numpy as np


def empty_network(f_hz: float, s_base_kva: float) -> Any:
    """Return what `pandapower.create_empty_network` returns, in a tenth of its time.

    The library makes each of its 126 empty tables without types and casts it column after column. The tables
    and their types are the library's own; a test holds the network against the library's.

    Parameters
    ----------
    f_hz : float
        Rated frequency. [Hz]
    s_base_kva : float
        Base power. [kVA]

    Returns
    -------
    pandapowerNet
        Without elements, with the library's standard types.
    """
    import pandas as pd
    from pandapower.auxiliary import pandapowerNet
    from pandapower.network_structure import get_structure_dict
    from pandapower.results import reset_results
    from pandapower.std_types import add_basic_std_types

    def column(dtype: Any) -> Any:
        extension = isinstance(dtype, pd.api.extensions.ExtensionDtype)
        return pd.array([], dtype=dtype) if extension else np.empty(0, dtype)

    rows = pd.Index([], dtype=np.int64)
    tables = {
        name: pd.DataFrame({c: column(t) for c, t in entry.items()}, index=rows)
        if isinstance(entry, dict)
        else entry
        for name, entry in get_structure_dict().items()
    }
    net = pandapowerNet(tables | {"name": "", "f_hz": f_hz, "sn_mva": s_base_kva / 1000.0})
    for kind in ("load", "sgen", "storage"):
        net[f"_empty_res_{kind}_3ph"] = net[f"_empty_res_{kind}"]
    add_basic_std_types(net)
    for mode in ("pf", "se", "sc", "pf_3ph"):
        reset_results(net, mode)
    net["user_pf_options"] = {}
    return net
