"""The empty pandapower network is the library's own, table by table."""

from __future__ import annotations

import pandapower
import pandas as pd

from study.network.solver_empty import empty_network


def test_every_entry_is_that_of_the_librarys_own_empty_network() -> None:
    ours = empty_network(60.0, 3000.0)
    theirs = pandapower.create_empty_network(f_hz=60.0, sn_mva=3.0)
    assert list(ours) == list(theirs)
    for name, entry in theirs.items():
        if isinstance(entry, pd.DataFrame):
            pd.testing.assert_frame_equal(ours[name], entry, obj=name)
        else:
            assert ours[name] == entry, name


def test_networks_share_no_table() -> None:
    one, other = empty_network(50.0, 1000.0), empty_network(50.0, 1000.0)
    tables = [name for name, entry in one.items() if isinstance(entry, pd.DataFrame)]
    assert not [name for name in tables if one[name] is other[name]]
