"""Bounded reading and atomic writing: the only place where tables touch the disk."""

from __future__ import annotations

import os
import secrets
from pathlib import Path

from simplexcub.errors import InputError, TableError

LARGEST_FILE = 64 * 1024 * 1024
_SIGNATURES = {
    b"\x1f\x8b": "gzip data",
    b"PK\x03\x04": "a zip or npz archive",
    b"\xff\xfe": "UTF-16 text",
    b"\xfe\xff": "UTF-16 text",
    b"BZh": "bzip2 data",
    b"\xfd7zXZ": "xz data",
    b"%PDF": "a PDF",
}


def read_text(path: str | os.PathLike[str]) -> str:
    """The text of a UTF-8 file of at most 64 MB, without byte-order mark and with plain line ends.

    Raises
    ------
    InputError
        The file cannot be opened.
    TableError
        It is too large or not UTF-8 text.
    """
    name = os.fspath(path)
    try:
        with open(name, "rb") as file:
            data = file.read(LARGEST_FILE + 1)
    except (OSError, ValueError) as error:
        raise InputError(f"{name} must be a readable file", _reason(error), "Check the path.") from None
    if len(data) > LARGEST_FILE:
        raise TableError(f"{name} must be a table of at most 64 MB", "a larger file", "Split it, or drop digits.")
    for signature, kind in _SIGNATURES.items():
        if data.startswith(signature):
            raise TableError(
                f"{name} must be JSON, CSV or text", kind, "Unpack or export it as JSON, CSV or text first."
            )
    if b"\0" in data:
        raise TableError(f"{name} must be JSON, CSV or text", "binary data", "Export it as JSON, CSV or text first.")
    try:
        text = data.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        raise TableError(f"{name} must be UTF-8 text", f"byte {error.start} that is not", "Save it as UTF-8.") from None
    return text.replace("\r\n", "\n").replace("\r", "\n")


def write_atomically(path: str | os.PathLike[str], data: bytes) -> None:
    """Write `data` so that `path` holds either all of it or what it held before.

    The bytes go to a new file in the same folder, reach the disk, and then take the name. Devices and pipes cannot be
    replaced and are written to directly.

    Raises
    ------
    InputError
        The path cannot be written; the message names it.
    """
    name = os.fspath(path)
    try:
        # A symbolic link keeps pointing where it did; its target is what is replaced.
        target = Path(os.path.realpath(name))
        if target.exists() and not target.is_file():
            target.write_bytes(data)
        else:
            _replace(target, data)
    except (OSError, ValueError) as error:
        remedy = "Nothing was changed; choose another path." if not isinstance(error, ValueError) else "Check the path."
        raise InputError(f"{name} must be a path that can be written", _reason(error), remedy) from None


def _replace(target: Path, data: bytes) -> None:
    temporary = target.with_name(f".{secrets.token_hex(6)}.tmp")
    mode = target.stat().st_mode & 0o777 if target.exists() else 0o666
    try:
        # O_EXCL never writes through a link planted under the temporary name; new files obey the umask.
        descriptor = os.open(temporary, os.O_WRONLY | os.O_CREAT | os.O_EXCL, mode)
        with open(descriptor, "wb") as file:
            file.write(data)
            file.flush()
            os.fsync(file.fileno())
        os.replace(temporary, target)
    except BaseException:
        temporary.unlink(missing_ok=True)
        raise
    _sync_folder(target.parent)


def _sync_folder(folder: Path) -> None:
    """Make the new name survive a power cut, where the file system lets folders be synced."""
    try:
        descriptor = os.open(folder, os.O_RDONLY)
    except OSError:
        return
    try:
        os.fsync(descriptor)
    except OSError:
        pass
    finally:
        os.close(descriptor)


def _reason(error: Exception) -> str:
    return (error.strerror or str(error)).lower() if isinstance(error, OSError) else str(error)
