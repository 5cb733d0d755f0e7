"""The limits in force: the built-in ones, with what the Acceptance sheet changes for this project."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass

from study.limits import BUILT_IN, LimitSpec
from study.model.plant import AcceptanceItem


@dataclass(frozen=True, slots=True, kw_only=True)
class LimitUsed:
    """One limit as it is applied; ``changed_by_project`` marks a value the project agreed."""

    key: str
    quantity: str
    limit: float | str
    unit: str
    basis: str
    changed_by_project: bool
    cell: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Limits:
    """Every limit by its key."""

    by_key: Mapping[str, LimitUsed]

    def number(self, key: str) -> float:
        """Return a numeric limit in its own unit (percent stay percent); KeyError for an unknown key."""
        return float(self.by_key[key].limit)

    def fraction(self, key: str) -> float:
        """Return a limit of the unit per cent as a fraction."""
        return self.number(key) / 100.0

    def text(self, key: str) -> str:
        """Return a limit that is a choice of words."""
        return str(self.by_key[key].limit)

    def basis(self, key: str) -> str:
        """Return the limit's basis, marked where the project agreed another value."""
        used = self.by_key[key]
        return f"agreed for this project: {used.basis}" if used.changed_by_project else used.basis


def limits_in_force(acceptance: Iterable[AcceptanceItem]) -> Limits:
    """Merge the built-in limits with the rows of the Acceptance sheet.

    Parameters
    ----------
    acceptance : iterable of AcceptanceItem
        Rows as read; the reader has refused unknown quantities and values that are no numbers.

    Returns
    -------
    Limits
        One entry for each built-in key.
    """
    given = {_fold(item.quantity): item for item in acceptance}
    return Limits(
        by_key={key: _merge(spec, given.get(_fold(spec.quantity))) for key, spec in BUILT_IN.items()}
    )


def _merge(spec: LimitSpec, item: AcceptanceItem | None) -> LimitUsed:
    limit = spec.limit if item is None else _in_unit_of(spec, item)
    changed = item is not None and limit != spec.limit
    basis = spec.basis
    if item is not None and changed:
        built_in = f"{spec.limit:g}" if isinstance(spec.limit, float) else spec.limit
        basis = item.basis or f"no basis is given; built in is {built_in} {spec.unit}".rstrip()
    return LimitUsed(
        key=spec.key,
        quantity=spec.quantity,
        limit=limit,
        unit=spec.unit,
        basis=basis,
        changed_by_project=changed,
        cell="" if item is None else item.cell,
    )


def _in_unit_of(spec: LimitSpec, item: AcceptanceItem) -> float | str:
    if spec.choices:
        folded = {_fold(choice): choice for choice in spec.choices}
        return folded[_fold(str(item.limit))]
    number = float(item.limit)
    if spec.unit == "%" and item.unit.strip().lower() in {"pu", "p.u."}:
        return number * 100.0
    return number


def _fold(text: str) -> str:
    return " ".join(text.lower().split())
