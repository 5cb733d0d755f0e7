"""Islands whose sources cannot share a load: kvar or kW would be undetermined, or nothing holds them."""

from __future__ import annotations

from collections.abc import Sequence

from study.network.sources import Law, Source, Speed


def refusal(members: Sequence[Source]) -> str:
    """Return why the sources of an island cannot share its load, or an empty text where they can.

    Parameters
    ----------
    members : sequence of Source
        Sources of one island.

    Returns
    -------
    str
        A sentence.
    """
    return _kvar_refusal(members) or _kw_refusal(members)


def _kvar_refusal(members: Sequence[Source]) -> str:
    if all(s.law == Law.REACTIVE_POWER for s in members):
        return f"nothing holds the voltage: {_list(members)} run at fixed kvar."
    holders = [s.name for s in members if s.law == Law.PHASOR and s.xc_pu == 0.0]
    holders += [s.name for s in members if s.law == Law.BEHIND_IMPEDANCE and s.xc_pu == s.r_pu == 0.0]
    for group in dict.fromkeys(s.cross_group for s in members if s.law == Law.CROSS_CURRENT):
        inside = [s for s in members if s.law == Law.CROSS_CURRENT and s.cross_group == group]
        if len(inside) > 1 and any(s.xc_pu == 0.0 for s in inside):
            return (
                f"cross-current compensation of {_list(inside)} has no droop setting: kvar is undetermined."
            )
        holders.append(" with ".join(s.name for s in inside))
    if len(holders) > 1:
        return (
            f"kvar is undetermined: {' and '.join(holders)} each hold the voltage without droop, and no "
            "cross-current compensation joins them."
        )
    return ""


def _kw_refusal(members: Sequence[Source]) -> str:
    shores = [s for s in members if s.speed == Speed.SHORE]
    masters = [s.name for s in members if s.speed == Speed.ISOCHRONOUS]
    sharing = [s for s in members if s.speed == Speed.LOAD_SHARING]
    if sharing:
        masters.append(" with ".join(s.name for s in sharing))
    if len({s.f_no_load_pu for s in shores}) > 1:
        return f"{_list(shores)} have different frequencies and are in parallel."
    if shores and masters:
        return (
            f"kW is undetermined: {' and '.join(masters)} would hold the frequency that {shores[0].name} "
            "holds; give a set power or a speed droop."
        )
    if len(masters) > 1:
        return f"kW is undetermined: {' and '.join(masters)} each hold the frequency, without load sharing."
    if not shores and all(s.speed == Speed.FIXED for s in members):
        return f"nothing holds the frequency: {_list(members)} run at fixed kW."
    return ""


def _list(members: Sequence[Source]) -> str:
    return " and ".join(s.name for s in members)
