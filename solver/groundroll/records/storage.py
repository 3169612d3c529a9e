"""The file behind a run's records: one writer at a time, partial until the run ends, plain words when storage fails.

On disk the file is `records.h5.partial` until it is put in place by one rename, so `records.h5` is at all
times absent, the one of an earlier run, or the one of this run. The writer holds an advisory lock (flock) on
the partial file; the system drops it when the process ends in whatever way, so no stale lock can stay.

HDF5 bears a full disk badly: the error comes late, at times only when a handle is closed, and the file may
be torn. So room is reserved before each put; chunks are not cached, so that a write fails where it is made;
and after a failure the file is cut off from HDF5 and stays as it was at the last flush.
"""

import errno
import fcntl
import itertools
import os
import re
from contextlib import contextmanager, suppress
from pathlib import Path

import h5py

from groundroll.errors import StorageError
from groundroll.records.layout import PARTIAL, RECORDS

_TABLES = 1 << 18  # bytes; beyond what HDF5 adds for one put, a few kB per dataset
_memory_names = itertools.count()


def _error_number(error: Exception) -> int | None:
    """errno of an error; HDF5 gives it at times only in its text."""
    if getattr(error, "errno", None):
        return error.errno
    found = re.search(r"errno = (\d+)", str(error))
    return int(found.group(1)) if found else None


def _reason(error: Exception) -> str:
    number = _error_number(error)
    if number in (errno.ENOSPC, errno.EDQUOT):
        return "no space is left on that disk; free some, or choose a folder on another disk with --out"
    if number in (errno.EACCES, errno.EPERM, errno.EROFS):
        return "this user may not write there; choose another folder with --out"
    if number == errno.EFBIG:
        return "the file has reached the largest size allowed there; ask for fewer snapshots, or raise the limit"
    if number in (errno.ENOTDIR, errno.EEXIST):
        return "a part of this path is a file, not a folder; choose another folder with --out"
    if number is not None:
        return os.strerror(number)
    return str(error)


@contextmanager
def plain_errors(doing: str, path: Path | None):
    """Turn the errors of the system and of HDF5 into a StorageError that says what failed, where and why."""
    try:
        yield
    except (OSError, RuntimeError) as error:
        where = path if path is not None else "memory"
        raise StorageError(f"{doing} failed at {where}: {_reason(error)}") from error


def _lock(path: Path) -> int:
    """Open the partial file and lock it; a file that was renamed or removed meanwhile is let go and opened anew."""
    while True:
        handle = os.open(path, os.O_RDWR | os.O_CREAT, 0o666)
        try:
            fcntl.flock(handle, fcntl.LOCK_EX | fcntl.LOCK_NB)
            if path.exists() and os.path.samestat(os.fstat(handle), os.stat(path)):
                return handle
        except BlockingIOError:
            os.close(handle)
            raise StorageError(
                f"another run is writing its records into {path.parent}; "
                "wait for it, or choose another folder with --out"
            ) from None
        except BaseException:
            os.close(handle)
            raise
        os.close(handle)


class DiskFile:
    """An HDF5 file written as records.h5.partial in `folder`, which is made if need be.

    Raises StorageError where the folder cannot be written or another process writes there.
    """

    def __init__(self, folder: Path):
        self.folder = Path(folder)
        self._partial = self.folder / PARTIAL
        with plain_errors("opening the records", self.folder):
            self.folder.mkdir(parents=True, exist_ok=True)
            self._handle = _lock(self._partial)
        try:
            with plain_errors("opening the records", self.folder):
                self.hdf = h5py.File(self._partial, "w", track_order=True, locking=False, rdcc_nbytes=0)
        except BaseException:
            os.close(self._handle)
            raise

    def settle(self) -> None:
        """Bring the file safely to disk and put it in the place of records.h5."""
        self.hdf.flush()
        self._give_back()
        self.hdf.close()
        os.fsync(self._handle)
        os.replace(self._partial, self.folder / RECORDS)
        folder = os.open(self.folder, os.O_RDONLY)
        with suppress(OSError):  # some network disks cannot sync a folder; the rename stands
            os.fsync(folder)
        os.close(folder)
        os.close(self._handle)

    def reserve(self, size: int) -> None:
        """Make sure that `size` bytes more (and HDF5's own tables for them) find room, or fail with nothing touched."""
        try:
            os.posix_fallocate(self._handle, self.hdf.id.get_filesize(), size + _TABLES)
        except OSError as error:
            if error.errno not in (errno.EOPNOTSUPP, errno.EINVAL):  # disks that cannot reserve
                raise

    def let_go(self, remove: bool = False) -> None:
        """Leave the partial file as it was at the last flush, or remove it; never raises for a failing disk."""
        with suppress(OSError, RuntimeError):
            self._give_back()
            nowhere = os.memfd_create("cut off")
            os.dup2(nowhere, self.hdf.id.get_vfd_handle())  # what HDF5 still holds back goes there
            os.close(nowhere)
        with suppress(OSError, RuntimeError):
            self.hdf.close()
        if remove:
            with suppress(OSError):
                self._partial.unlink()
        os.close(self._handle)

    def _give_back(self) -> None:
        """Cut off what was reserved beyond the end of the data."""
        size = os.fstat(self._handle).st_size
        os.ftruncate(self._handle, min(size, self.hdf.id.get_filesize()))


class MemoryFile:
    """The same file in memory only; nothing touches the disk."""

    folder = None

    def __init__(self):
        name = f"records in memory {next(_memory_names)}"
        self.hdf = h5py.File(
            name, "w", driver="core", backing_store=False, block_size=1 << 20, track_order=True, locking=False
        )

    def settle(self) -> None:
        """Nothing to do: the file stays open for its reader."""

    def reserve(self, size: int) -> None:
        """Nothing to do: memory is taken as it is needed."""

    def let_go(self, remove: bool = False) -> None:
        """Give the memory back."""
        self.hdf.close()
