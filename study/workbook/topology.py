"""What joins what: ends of branches, boards without a source, supplies in a circle."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from typing import Final

from study.issues import Severity
from study.workbook.cells import shown
from study.workbook.faults import Findings
from study.workbook.headings import folded
from study.workbook.links import Names, RowsBySheet
from study.workbook.sheets import SOURCE_SHEETS
from study.workbook.tables import Row

# Fields that name the boards of a branch, by its sheet.
BRANCH_BOARDS: Final = {
    "Transformers": ("from_board", "to_board"),
    "Three-winding transformers": ("primary_board", "secondary_board", "tertiary_board"),
    "Cables": ("from_end", "to_end"),
    "Ties": ("board_a", "board_b"),
    "Reactors": ("from_board", "to_board"),
}
END_WORDS: Final = {
    "Transformers": {
        "from": "from_board",
        "primary": "from_board",
        "to": "to_board",
        "secondary": "to_board",
    },
    "Three-winding transformers": {
        "primary": "primary_board",
        "from": "primary_board",
        "secondary": "secondary_board",
        "tertiary": "tertiary_board",
    },
    "Cables": {"from": "from_end", "to": "to_end"},
    "Ties": {"a": "board_a", "b": "board_b", "from": "board_a", "to": "board_b"},
    "Reactors": {"from": "from_board", "to": "to_board"},
}


@dataclass(frozen=True, slots=True, kw_only=True)
class Plan:
    """The rows, their names, and the list that takes what is found."""

    rows: RowsBySheet
    names: Names
    found: Findings

    def of(self, *sheets: str) -> Iterator[Row]:
        """Yield the rows of some sheets."""
        for sheet in sheets:
            yield from self.rows.get(sheet, ())

    def report(
        self, code: str, row: Row, field: str, said: str, wanted: str, *, warning: bool = False
    ) -> None:
        """Add what is wrong with one field of a row."""
        severity: Severity = "warning" if warning else "fault"
        self.found.add(code, row.sheet, row.cell(field), said, wanted, severity=severity)
        if not warning:
            row.broken.add(field)


def check_topology(plan: Plan) -> None:
    """Report everything that is wrong with what joins what."""
    for sheet, fields in BRANCH_BOARDS.items():
        for row in plan.of(sheet):
            _check_two_ends(plan, row, fields)
    for row in plan.of("Transfers"):
        _check_two_ends(plan, row, ("target", "normal_supply", "other_supply"))
    for row in plan.of("Interlocks"):
        _check_two_ends(plan, row, ("equipment_a", "equipment_b"))
    _check_cables(plan)
    for row in plan.of("Devices"):
        _check_device_end(plan, row)
    _check_reach(plan)
    _check_circles(plan)


def _check_two_ends(plan: Plan, row: Row, fields: tuple[str, ...]) -> None:
    seen: dict[str, str] = {}
    for name in fields:
        end = row.values.get(name)
        if end is not None and seen.setdefault(end, name) != name:
            ends = "at two ends" if row.sheet in BRANCH_BOARDS else "twice"
            said = f"{row.name or 'the row'} names {shown(end)} {ends}"
            plan.report("same-end", row, name, said, "give two different ones")


def _check_cables(plan: Plan) -> None:
    pairs: dict[tuple[str, str], Row] = {}
    other_feeds = _other_feeds(plan)
    for row in plan.of("Cables"):
        if not row.has("from_end", "to_end"):
            continue
        ends = (row.values["from_end"], row.values["to_end"])
        boards = [end for end in ends if plan.names.sheet_of(end) == "Boards"]
        if len(boards) != 1:
            if not boards:
                said = f"{row.name} runs from {shown(ends[0])} to {shown(ends[1])}, and neither is a board"
                plan.report("no-board-end", row, "from_end", said, "let one end be a board")
            continue
        other = ends[1] if ends[0] == boards[0] else ends[0]
        field = "to_end" if ends[0] == boards[0] else "from_end"
        if _has_unknown_board(plan, other):
            continue
        allowed = boards_of(plan, other) | other_feeds.get(other, set())
        if allowed and boards[0] not in allowed:
            said = f"{row.name} joins {shown(other)} to {shown(boards[0])}"
            there = " and ".join(sorted(allowed))
            wanted = f"{other} is on {there}; let the cable end there, or move {other}"
            plan.report("wrong-board", row, field, said, wanted)
        first = pairs.setdefault((boards[0], other), row)
        if first is not row:
            said = f"{first.name} joins {shown(boards[0])} and {shown(other)} already"
            plan.report("doubled-cable", row, field, said, "give equal cables as runs in parallel of one row")


def boards_of(plan: Plan, name: str) -> set[str]:
    """Return the boards that a piece of equipment is on or joins."""
    row = plan.names.rows.get(name)
    if row is None:
        return set()
    if row.sheet == "Boards":
        return {name}
    fields = BRANCH_BOARDS.get(row.sheet, ("board",))
    ends = {row.values[field] for field in fields if row.values.get(field) is not None}
    return {end for end in ends if plan.names.sheet_of(end) == "Boards"}


def _has_unknown_board(plan: Plan, name: str) -> bool:
    """Return True where a board of a piece of equipment is at fault itself."""
    row = plan.names.rows.get(name)
    if row is None or row.sheet == "Boards":
        return False
    fields = BRANCH_BOARDS.get(row.sheet, ("board",))
    return any(row.values.get(field) is None for field in fields)


def _other_feeds(plan: Plan) -> dict[str, set[str]]:
    """Return the boards of the other supplies of each load."""
    feeds: dict[str, set[str]] = {}
    for row in plan.of("Transfers"):
        for name in ("normal_supply", "other_supply"):
            if row.has("target", name):
                feeds.setdefault(row.values["target"], set()).update(boards_of(plan, row.values[name]))
    return feeds


def _check_device_end(plan: Plan, row: Row) -> None:
    """Replace the end of a device by the name that stands at it."""
    text = row.values.get("end")
    equipment = plan.names.rows.get(row.values.get("equipment", ""))
    if text is None or equipment is None or equipment.broken:
        return
    words = END_WORDS.get(equipment.sheet, {})
    fields = BRANCH_BOARDS.get(equipment.sheet, ("board",))
    ends = {folded(str(equipment.values[f])): equipment.values[f] for f in fields if equipment.has(f)}
    ends |= {word: equipment.values.get(field) for word, field in words.items()}
    ends.setdefault(folded(equipment.name), equipment.name)
    end = ends.get(folded(text))
    if end is None:
        known = sorted({str(e) for e in ends.values() if e is not None} | set(words))
        said = f"{row.name}: {equipment.name} has no end {shown(text)}"
        plan.report("unknown-end", row, "end", said, f"write one of {', '.join(known)}")
    else:
        row.values["end"] = end


def _check_reach(plan: Plan) -> None:
    joined = _Groups()
    for sheet in BRANCH_BOARDS:
        for row in plan.of(sheet):
            joined.join(boards_of(plan, row.name))
    for row in plan.of("Transfers"):
        if row.has("target", "normal_supply", "other_supply"):
            names = (row.values["target"], row.values["normal_supply"], row.values["other_supply"])
            joined.join({board for name in names for board in boards_of(plan, name)})
    sources = list(plan.of(*SOURCE_SHEETS))
    if not plan.found.unread.isdisjoint(SOURCE_SHEETS):
        return
    if not sources:
        plan.found.add("no-sources", "Gensets", "", "the plant has no set and no supply", "add what feeds it")
        return
    fed = {joined.of(row.values["board"]) for row in sources if row.has("board")}
    # With a reference at fault somewhere, a board may only seem to be cut off.
    if plan.found.any_fault:
        return
    for row in plan.of("Boards"):
        if joined.of(row.name) not in fed:
            plan.report(
                "no-source", row, "name", f"no source can reach {row.name} by any transformer, cable or tie",
                "join it to a board that is fed, or take it out",
            )  # fmt: skip


class _Groups:
    """Boards that hang together."""

    def __init__(self) -> None:
        self._parent: dict[str, str] = {}

    def of(self, name: str) -> str:
        """Return the board that stands for the group of `name`."""
        root = name
        while self._parent.get(root, root) != root:
            root = self._parent[root]
        while self._parent.get(name, name) != root:
            self._parent[name], name = root, self._parent[name]
        return root

    def join(self, names: Iterable[str]) -> None:
        """Make one group of several boards."""
        first, *others = [*names, ""]
        for name in others:
            if name:
                self._parent[self.of(name)] = self.of(first)


def _check_circles(plan: Plan) -> None:
    """Report boards whose normal supplies follow each other in a circle."""
    normal = {row.values["target"]: row for row in plan.of("Transfers") if row.has("target", "normal_supply")}
    for start, row in normal.items():
        seen = [start]
        supply = row.values["normal_supply"]
        while supply in normal and supply not in seen:
            seen.append(supply)
            supply = normal[supply].values["normal_supply"]
        if supply == start:
            said = f"the normal supplies go in a circle: {', '.join([*seen, start])}"
            plan.report("circular-feed", row, "normal_supply", said, "let one of them come from elsewhere")
