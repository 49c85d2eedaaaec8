"""Writing files so that a crash, a full disk or a second run at the same time loses nothing that was there."""

from __future__ import annotations

import os
import stat
import tempfile
from collections.abc import Iterator
from contextlib import contextmanager, suppress
from pathlib import Path
from time import sleep

_PAUSE = 0.02
_ATTEMPTS = 500
#: Windows locks bytes and keeps others from reading them, so the byte is one that no file has.
_LOCKED_BYTE = 1 << 30
BINARY = getattr(os, "O_BINARY", 0)


def replace_file(path: Path, content: bytes) -> None:
    """Make `content` the whole of `path`, or leave it as it was. A link is followed; the permissions are kept.

    Raises OSError.
    """
    path = Path(os.path.realpath(path))
    if path.exists() and not path.is_file():  # a device or a pipe cannot be replaced
        path.write_bytes(content)
        return
    handle, name = tempfile.mkstemp(dir=path.parent, prefix=f".{path.name}.", suffix=".part")
    try:
        with os.fdopen(handle, "wb") as file:
            file.write(content)
            file.flush()
            os.fsync(file.fileno())
        os.chmod(name, _mode(path))
        os.replace(name, path)
    except BaseException:
        with suppress(OSError):
            os.unlink(name)
        raise


def _mode(path: Path) -> int:
    """The permissions of `path`, or those that a new file gets."""
    try:
        return stat.S_IMODE(path.stat().st_mode)
    except OSError:
        mask = os.umask(0)
        os.umask(mask)
        return 0o666 & ~mask


def append(path: Path, content: bytes) -> None:
    """Add whole lines to the end of `path`: all of them, or none and OSError.

    Runs that append at the same time wait for one another. A last line that an earlier crash cut off is ended
    first, so that it spoils no line but itself.
    """
    descriptor = os.open(path, os.O_RDWR | os.O_CREAT | os.O_APPEND | BINARY, 0o666)
    try:
        if not stat.S_ISREG(os.fstat(descriptor).st_mode):
            write(descriptor, content)
            return
        with locked(descriptor):
            size = os.fstat(descriptor).st_size
            if size:
                os.lseek(descriptor, size - 1, os.SEEK_SET)
                if os.read(descriptor, 1) != b"\n":
                    content = b"\n" + content
            try:
                write(descriptor, content)
                os.fsync(descriptor)
            except OSError:
                with suppress(OSError):
                    os.ftruncate(descriptor, size)
                raise
    finally:
        os.close(descriptor)


def write(descriptor: int, content: bytes) -> None:
    """Write all of `content` to an open file. Raises OSError."""
    rest = memoryview(content)
    while rest:
        rest = rest[os.write(descriptor, rest) :]


@contextmanager
def locked(descriptor: int) -> Iterator[None]:
    """Hold the lock of an open file. Where the file system knows no locks, or after ten seconds, go on without."""
    for _ in range(_ATTEMPTS):
        held = try_lock(descriptor)
        if held is not False:
            break
        sleep(_PAUSE)
    try:
        yield
    finally:
        if held:
            unlock(descriptor)


try:
    import fcntl
except ImportError:  # Windows

    def try_lock(descriptor: int) -> bool | None:
        """Take the lock: True; False where another process holds it; None where it cannot be known."""
        import msvcrt

        place = os.lseek(descriptor, 0, os.SEEK_CUR)
        try:
            os.lseek(descriptor, _LOCKED_BYTE, os.SEEK_SET)
            msvcrt.locking(descriptor, msvcrt.LK_NBLCK, 1)  # type: ignore[attr-defined,unused-ignore]
        except PermissionError:
            return False
        except OSError:
            return None
        finally:
            os.lseek(descriptor, place, os.SEEK_SET)
        return True

    def unlock(descriptor: int) -> None:
        """Give the lock back."""
        import msvcrt

        os.lseek(descriptor, _LOCKED_BYTE, os.SEEK_SET)
        msvcrt.locking(descriptor, msvcrt.LK_UNLCK, 1)  # type: ignore[attr-defined,unused-ignore]

else:

    def try_lock(descriptor: int) -> bool | None:
        """Take the lock: True; False where another process holds it; None where it cannot be known."""
        try:
            fcntl.flock(descriptor, fcntl.LOCK_EX | fcntl.LOCK_NB)
        except BlockingIOError:
            return False
        except OSError:
            return None
        return True

    def unlock(descriptor: int) -> None:
        """Give the lock back."""
        fcntl.flock(descriptor, fcntl.LOCK_UN)


def reason(error: OSError) -> str:
    """What went wrong, in the system's words, without errno and path."""
    return (error.strerror or str(error)).lower()
