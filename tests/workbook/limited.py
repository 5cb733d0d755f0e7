"""The program as a user starts it, in a process that may not take all memory and says what it used."""

from __future__ import annotations

import re
import subprocess
import sys
import tempfile
from dataclasses import dataclass
from pathlib import Path

ROOT = Path(__file__).parents[2]
ADDRESS_SPACE = 4 * 2**30


@dataclass(frozen=True)
class Ended:
    """How a run ended: exit status, what was printed, seconds of the processor, most memory."""

    status: int
    out: str
    err: str
    seconds: float
    peak_mb: float


def study(*words: str | Path) -> Ended:
    """Run a command of the program and return how it ended."""
    with tempfile.TemporaryDirectory() as folder:
        used = Path(folder) / "used"
        done = subprocess.run(
            [sys.executable, "-m", "tests.workbook.limited", str(used), *map(str, words)],
            cwd=ROOT, capture_output=True, text=True, check=False, timeout=600,
        )  # fmt: skip
        seconds, kilobytes = used.read_text().split()
    return Ended(done.returncode, done.stdout, done.stderr, float(seconds), float(kilobytes) / 1024)


def peak_kilobytes() -> int:
    """Return the most memory that this process has had; 0 where the system does not say."""
    try:
        found = re.search(r"VmHWM:\s*(\d+)", Path("/proc/self/status").read_text())
    except OSError:
        return 0
    return int(found[1]) if found else 0


def main() -> int:
    """Run the program and write what it used into the file that the first word names."""
    import resource

    from study.cli import main as command

    resource.setrlimit(resource.RLIMIT_AS, (ADDRESS_SPACE, ADDRESS_SPACE))
    try:
        return command(sys.argv[2:])
    finally:
        used = resource.getrusage(resource.RUSAGE_SELF)
        Path(sys.argv[1]).write_text(f"{used.ru_utime + used.ru_stime} {peak_kilobytes()}")


if __name__ == "__main__":
    sys.exit(main())
