"""Writes the list of sheets and columns into DEVELOPERS.md, from the one description of them."""

from __future__ import annotations

from pathlib import Path

from study.workbook import column_documentation

PAGE = Path(__file__).parents[2] / "DEVELOPERS.md"
BEGIN, END = "<!-- columns: written by `python -m tests.house.write_columns` -->", "<!-- end of columns -->"


def with_columns(page: str) -> str:
    """Return the page with the list between its two marks renewed."""
    head, rest = page.split(BEGIN)
    _, tail = rest.split(END)
    return f"{head}{BEGIN}\n\n{column_documentation().strip()}\n\n{END}{tail}"


if __name__ == "__main__":
    PAGE.write_text(with_columns(PAGE.read_text(encoding="utf-8")), encoding="utf-8")
