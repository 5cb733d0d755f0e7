"""A file written whole or not at all."""

from __future__ import annotations

import contextlib
import errno
import hashlib
import os
import re
import stat
import tempfile
import time
from pathlib import Path

from study.issues import ChangedFileError, PackageError

LEFT_OVER_S = 3600.0
"""Age from which a temporary file is that of a killed run: a write takes seconds."""
_REASONS = {
    errno.ENOSPC: "the disk is full",
    errno.EDQUOT: "the disk quota is used up",
    errno.EROFS: "the disk is read-only",
    errno.EACCES: "the file or its folder is read-only, or the file is open in another program",
    errno.EPERM: "the file or its folder is read-only, or the file is open in another program",
    errno.EBUSY: "the file is open in another program",
    errno.ETXTBSY: "the file is open in another program",
}


def write_atomically(path: str | Path, data: bytes, *, read_digest: str | None = None) -> None:
    """Replace a file by new content; whatever goes wrong, the old file stays whole.

    The content goes to a temporary file beside the target, is flushed to the disk and then takes the target's
    name in one step. Permissions of an existing file are kept; a symbolic link stays one. Temporary files
    that a killed run left beside the target an hour ago or earlier are removed.

    Parameters
    ----------
    path : str or Path
        The file to write.
    data : bytes
        Its whole content.
    read_digest : str, optional
        SHA-256 of the file as it was read. When given, the file must still be there and unchanged.

    Raises
    ------
    PackageError
        The file cannot be written, is open in another program, is read-only, or has changed meanwhile.
    """
    target = Path(os.path.realpath(path))
    temporary: Path | None = None
    try:
        mode = _mode_of(target)
        _refuse_open(target)
        _refuse_changed(target, read_digest)
        _clear_left_over(target)
        handle, name = tempfile.mkstemp(prefix=_prefix(target), suffix=".tmp", dir=target.parent)
        temporary = Path(name)
        with os.fdopen(handle, "wb") as stream:
            stream.write(data)
            stream.flush()
            _sync(stream.fileno())
        _keep_owner(temporary, target)
        os.chmod(temporary, mode)
        # Once more, as near to the rename as can be: another program may have saved while we wrote.
        _refuse_changed(target, read_digest)
        os.replace(temporary, target)
    except OSError as error:
        reason = _REASONS.get(error.errno or 0, error.strerror or "the system gives no reason")
        raise PackageError(
            f"{target.name}: the file was not written, {reason}; what was there before is unharmed"
        ) from error
    finally:
        if temporary is not None:
            with contextlib.suppress(OSError):
                temporary.unlink(missing_ok=True)
    _sync_folder(target.parent)


def _prefix(target: Path) -> str:
    return f".{target.name[:100]}."


def _clear_left_over(target: Path) -> None:
    """Remove what killed runs left; the temporary file of a run that is still at work is younger."""
    name = re.compile(re.escape(_prefix(target)) + r"[a-z0-9_]{8}\.tmp")
    with contextlib.suppress(OSError), os.scandir(target.parent) as entries:
        for entry in entries:
            if name.fullmatch(entry.name) and entry.is_file(follow_symlinks=False):
                age_s = time.time() - entry.stat(follow_symlinks=False).st_mtime
                if age_s > LEFT_OVER_S:
                    os.unlink(entry.path)


def _mode_of(target: Path) -> int:
    """Return the permission bits for the new file: those of the old one, or the usual ones."""
    try:
        old = target.stat()
    except FileNotFoundError:
        mask = os.umask(0)
        os.umask(mask)
        return 0o666 & ~mask
    if not stat.S_ISREG(old.st_mode):
        raise PackageError(f"{target.name}: this is no ordinary file, nothing was written")
    if not old.st_mode & (stat.S_IWUSR | stat.S_IWGRP | stat.S_IWOTH):
        raise PackageError(f"{target.name}: the file is marked read-only, nothing was written")
    return stat.S_IMODE(old.st_mode)


def _refuse_open(target: Path) -> None:
    """Raise when an office program has left its lock file: saving there would undo what we write."""
    for lock in (f"~${target.name}", f".~lock.{target.name}#"):
        if (target.parent / lock).exists():
            raise PackageError(
                f"{target.name}: the file is open in another program, close it there and run again "
                f"(if it is not, delete the lock file {lock} beside it)"
            )


def _refuse_changed(target: Path, read_digest: str | None) -> None:
    if read_digest is None:
        return
    try:
        found = hashlib.sha256(target.read_bytes()).hexdigest()
    except FileNotFoundError:
        raise ChangedFileError(
            f"{target.name}: the file was moved or deleted while the study ran, nothing was written"
        ) from None
    if found != read_digest:
        raise ChangedFileError(
            f"{target.name}: the file was changed while the study ran, nothing was written; run again"
        )


def _keep_owner(temporary: Path, target: Path) -> None:
    """Give the new file the owner of the old one where the system lets us."""
    with contextlib.suppress(OSError, AttributeError):
        old = target.stat()
        os.chown(temporary, old.st_uid, old.st_gid)


def _sync(handle: int) -> None:
    """Flush to the disk; some network drives cannot be asked to, which is no reason to fail."""
    try:
        os.fsync(handle)
    except OSError as error:
        if error.errno not in (errno.EINVAL, errno.ENOTSUP, errno.ENOSYS):
            raise


def _sync_folder(folder: Path) -> None:
    """Flush the rename itself; some systems cannot, and the file is in place already."""
    with contextlib.suppress(OSError):
        handle = os.open(folder, os.O_RDONLY)
        try:
            os.fsync(handle)
        finally:
            os.close(handle)
