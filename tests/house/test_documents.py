"""The two documents say what the code does."""

from __future__ import annotations

import re
from pathlib import Path

from study.cli import _parser
from tests.house.write_columns import PAGE, with_columns

README = Path(__file__).parents[2] / "README.md"


def test_the_column_list_is_that_of_the_specs() -> None:
    page = PAGE.read_text(encoding="utf-8")
    assert page == with_columns(page), "run python -m tests.house.write_columns"


def test_every_file_that_the_documents_name_exists() -> None:
    root = README.parent
    for page in (README, PAGE):
        for path in re.findall(r"`((?:study|tests|templates|workbooks)/[\w./-]+)`", page.read_text("utf-8")):
            assert (root / path).exists(), f"{page.name} names {path}"


def test_every_command_that_the_readme_shows_is_understood() -> None:
    commands = re.findall(
        r"`?(?:\.venv/bin/)?study ((?:run|check|new|compare) [^`\n#&]+)", README.read_text()
    )
    assert len(commands) >= 5
    for line in commands:
        words = [w.strip('"') for w in re.findall(r'"[^"]+"|\S+', line.strip())]
        assert callable(_parser().parse_args(words).command)
