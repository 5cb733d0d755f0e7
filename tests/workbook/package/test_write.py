"""A file is written whole or not at all; that the rename is atomic is POSIX, rename(2)."""

from __future__ import annotations

import contextlib
import errno
import hashlib
import os
import signal
import stat
import subprocess
import sys
import tempfile
import textwrap
from pathlib import Path

import pytest

from study.issues import PackageError
from study.workbook.package import open_package, write, write_atomically
from tests.workbook.package.samples import engineers_book

OLD, NEW = b"the old file", b"the new file " * 1000
ROOT = Path(__file__).parents[3]


@pytest.fixture
def target(tmp_path):
    path = tmp_path / "BOOK.xlsx"
    path.write_bytes(OLD)
    return path


def unharmed(path):
    assert path.read_bytes() == OLD
    assert os.listdir(path.parent) == [path.name]


def test_the_new_content_takes_the_place(target):
    write_atomically(target, NEW)
    assert target.read_bytes() == NEW
    assert os.listdir(target.parent) == ["BOOK.xlsx"]


def test_a_file_that_was_not_there(tmp_path):
    mask = os.umask(0o027)
    try:
        write_atomically(str(tmp_path / "new.xlsx"), NEW)
    finally:
        os.umask(mask)
    assert (tmp_path / "new.xlsx").read_bytes() == NEW
    assert stat.S_IMODE((tmp_path / "new.xlsx").stat().st_mode) == 0o640


@pytest.mark.skipif(os.name == "nt", reason="permission bits are a POSIX matter")
@pytest.mark.parametrize("mode", [0o600, 0o664, 0o640])
def test_permissions_are_kept(target, mode):
    target.chmod(mode)
    write_atomically(target, NEW)
    assert stat.S_IMODE(target.stat().st_mode) == mode


@pytest.mark.skipif(os.name == "nt" or os.geteuid() != 0, reason="only root can give files away")
def test_the_owner_is_kept(target):
    os.chown(target, 12345, 23456)
    write_atomically(target, NEW)
    assert (target.stat().st_uid, target.stat().st_gid) == (12345, 23456)


@pytest.mark.skipif(os.name == "nt", reason="links need rights on Windows")
def test_a_symbolic_link_stays_one(target, tmp_path):
    folder = tmp_path / "links"
    folder.mkdir()
    link = folder / "link.xlsx"
    link.symlink_to(target)
    write_atomically(link, NEW)
    assert link.is_symlink()
    assert target.read_bytes() == NEW
    assert os.listdir(folder) == ["link.xlsx"]


def failing(code):
    def fail(*_args, **_kwargs):
        raise OSError(code, os.strerror(code))

    return fail


@pytest.mark.parametrize("step", ["os.fsync", "os.replace", "os.fdopen", "tempfile.mkstemp", "os.chmod"])
@pytest.mark.parametrize(
    ("code", "reason"),
    [
        (errno.ENOSPC, "the disk is full"),
        (errno.EROFS, "the disk is read-only"),
        (errno.EACCES, "read-only, or the file is open in another program"),
        (errno.EIO, "Input/output error"),
    ],
)
def test_whatever_fails_the_old_file_is_whole(target, monkeypatch, step, code, reason):
    with monkeypatch.context() as patch:
        patch.setattr(step, failing(code))
        with pytest.raises(PackageError, match=reason) as caught:
            write_atomically(target, NEW)
    assert str(caught.value).startswith("BOOK.xlsx: the file was not written, ")
    assert "\n" not in str(caught.value)
    unharmed(target)


def test_a_disk_that_fills_while_writing(target, monkeypatch):
    real = os.fdopen

    class Full:
        def __init__(self, stream):
            self.stream = stream

        def __enter__(self):
            return self

        def __exit__(self, *_):
            self.stream.close()

        def write(self, data):
            self.stream.write(data[:100])
            self.stream.flush()
            raise OSError(errno.ENOSPC, "No space left on device")

    monkeypatch.setattr(os, "fdopen", lambda handle, mode: Full(real(handle, mode)))
    with pytest.raises(PackageError, match="the disk is full"):
        write_atomically(target, NEW)
    unharmed(target)


@pytest.mark.skipif(not Path("/dev/full").exists(), reason="no /dev/full on this system")
def test_a_disk_that_is_really_full(target, monkeypatch):
    """The write goes to a device that the kernel reports as full."""
    real = os.fdopen

    def onto_full(handle, mode):
        full = os.open("/dev/full", os.O_WRONLY)
        os.dup2(full, handle)
        os.close(full)
        return real(handle, mode)

    monkeypatch.setattr(os, "fdopen", onto_full)
    with pytest.raises(PackageError, match="the disk is full"):
        write_atomically(target, NEW)
    unharmed(target)


def test_a_network_drive_that_cannot_flush(target, monkeypatch):
    monkeypatch.setattr(os, "fsync", failing(errno.EINVAL))
    write_atomically(target, NEW)
    assert target.read_bytes() == NEW


def test_a_read_only_file(target):
    target.chmod(0o444)
    with pytest.raises(PackageError, match="marked read-only, nothing was written"):
        write_atomically(target, NEW)
    unharmed(target)


@contextlib.contextmanager
def an_ordinary_user():
    """Root may write anywhere: the rights of another user while the test goes on."""
    if os.geteuid() != 0:
        yield
        return
    os.seteuid(65534)
    try:
        yield
    finally:
        os.seteuid(0)


@pytest.mark.skipif(os.name == "nt", reason="permission bits are a POSIX matter")
def test_a_read_only_folder():
    with tempfile.TemporaryDirectory() as folder:
        target = Path(folder) / "BOOK.xlsx"
        target.write_bytes(OLD)
        target.chmod(0o666)
        target.parent.chmod(0o555)
        try:
            with an_ordinary_user(), pytest.raises(PackageError, match="the file or its folder is read-only"):
                write_atomically(target, NEW)
            unharmed(target)
        finally:
            target.parent.chmod(0o755)


def test_a_folder_that_is_not_there(tmp_path):
    with pytest.raises(PackageError, match=r"new\.xlsx: the file was not written, No such file"):
        write_atomically(tmp_path / "none" / "new.xlsx", NEW)


def test_a_folder_in_the_place_of_the_file(tmp_path):
    with pytest.raises(PackageError, match="no ordinary file"):
        write_atomically(tmp_path, NEW)


@pytest.mark.parametrize("lock", ["~$BOOK.xlsx", ".~lock.BOOK.xlsx#"])
def test_a_file_open_in_an_office_program(target, lock):
    """Names of the lock files: common practice of the spreadsheet programs, no source."""
    (target.parent / lock).write_bytes(b"")
    with pytest.raises(PackageError, match="open in another program") as caught:
        write_atomically(target, NEW)
    assert lock in str(caught.value)
    assert target.read_bytes() == OLD


def test_a_file_changed_since_it_was_read(target):
    digest = hashlib.sha256(OLD).hexdigest()
    target.write_bytes(b"saved meanwhile")
    with pytest.raises(PackageError, match="changed while the study ran"):
        write_atomically(target, NEW, read_digest=digest)
    assert target.read_bytes() == b"saved meanwhile"
    target.unlink()
    with pytest.raises(PackageError, match="moved or deleted while the study ran"):
        write_atomically(target, NEW, read_digest=digest)
    assert os.listdir(target.parent) == []


def test_a_file_changed_while_the_new_one_was_written(target, monkeypatch):
    real = os.fsync

    def saved_meanwhile(handle):
        target.write_bytes(b"saved meanwhile")
        real(handle)

    monkeypatch.setattr(os, "fsync", saved_meanwhile)
    with pytest.raises(PackageError, match="changed while the study ran"):
        write_atomically(target, NEW, read_digest=hashlib.sha256(OLD).hexdigest())
    assert target.read_bytes() == b"saved meanwhile"
    assert os.listdir(target.parent) == ["BOOK.xlsx"]


def test_the_digest_is_the_one_of_the_package(target):
    target.write_bytes(engineers_book())
    package = open_package(target)
    write_atomically(target, NEW, read_digest=package.digest)
    assert target.read_bytes() == NEW


@pytest.mark.skipif(os.name == "nt", reason="SIGKILL is a POSIX matter")
@pytest.mark.parametrize("step", ["replace", "fsync"])
def test_a_process_killed_between_write_and_rename(target, step):
    program = f"""
        import os, signal
        from study.workbook.package import write_atomically
        os.{step} = lambda *_: os.kill(os.getpid(), signal.SIGKILL)
        write_atomically({str(target)!r}, b"new" * 1000)
    """
    done = subprocess.run([sys.executable, "-c", textwrap.dedent(program)], cwd=ROOT, check=False)
    assert done.returncode == -signal.SIGKILL
    assert target.read_bytes() == OLD
    left = [n for n in os.listdir(target.parent) if n != "BOOK.xlsx"]
    assert len(left) == 1
    assert left[0].startswith(".BOOK.xlsx.")
    # It may be that of a run still at work; an hour later it is none.
    write_atomically(target, NEW)
    assert sorted(os.listdir(target.parent)) == sorted([*left, "BOOK.xlsx"])
    made = (target.parent / left[0]).stat().st_mtime - write.LEFT_OVER_S - 1.0
    os.utime(target.parent / left[0], (made, made))
    write_atomically(target, NEW)
    assert os.listdir(target.parent) == ["BOOK.xlsx"]
    assert target.read_bytes() == NEW


def test_no_other_file_is_taken_for_a_left_over_one(target):
    others = [
        ".BOOK.xlsx.tmp",
        ".BOOK.xlsx.of-mine.tmp",
        "BOOK.xlsx.abcd1234.tmp",
        ".OTHER.xlsx.abcd1234.tmp",
    ]
    for name in others:
        (target.parent / name).write_bytes(b"mine")
        os.utime(target.parent / name, (0, 0))
    (target.parent / ".BOOK.xlsx.abcd1234.tmp").mkdir()
    (target.parent / ".BOOK.xlsx.abcd1235.tmp").symlink_to(target.parent / others[0])
    before = sorted(os.listdir(target.parent))
    write_atomically(target, NEW)
    assert sorted(os.listdir(target.parent)) == before


def test_the_flush_comes_before_the_rename(target, monkeypatch):
    steps = []
    for name in ("fsync", "replace"):
        real = getattr(os, name)
        monkeypatch.setattr(os, name, lambda *a, name=name, real=real: (steps.append(name), real(*a))[1])
    write_atomically(target, NEW)
    assert steps[:2] == ["fsync", "replace"]
    assert write.os.replace is os.replace
