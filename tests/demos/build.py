"""Write the demo workbooks: ``python -m tests.demos.build``."""

from __future__ import annotations

from pathlib import Path

from study.workbook.blank import write_workbook
from tests.demos import large_vessel, service_vessel, workboat

FOLDER = Path(__file__).parents[2] / "workbooks"
DEMOS = {"workboat": workboat, "service-vessel": service_vessel, "large-vessel": large_vessel}


def write_all(folder: Path = FOLDER) -> None:
    """Write the workbook of each demo vessel into `folder`."""
    folder.mkdir(parents=True, exist_ok=True)
    for name, vessel in DEMOS.items():
        write_workbook(folder / f"{name}.xlsx", vessel.tables())


if __name__ == "__main__":
    write_all()
