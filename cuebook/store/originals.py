"""Originals: unchanged recordings, kept by the hash of their bytes."""

from __future__ import annotations

import hashlib
import os
import secrets
from contextlib import suppress
from dataclasses import dataclass
from pathlib import Path

from cuebook.errors import StoreUnavailableError


@dataclass(frozen=True, slots=True)
class KeptOriginal:
    """An original that lies safely in the library's folder."""

    sha256: str
    size_bytes: int
    path: Path


def get_original_path(folder: Path, sha256: str) -> Path:
    """Return where an original lies below the folder of originals."""
    return folder / "objects" / sha256[:2] / sha256


def keep_original_file(folder: Path, content: bytes) -> KeptOriginal:
    """Write bytes under their hash, so that they are wholly there or not at all.

    Raises
    ------
    StoreUnavailableError : the folder cannot be written.
    """
    sha256 = hashlib.sha256(content).hexdigest()
    path = get_original_path(folder, sha256)
    if path.exists():
        return KeptOriginal(sha256, len(content), path)
    temporary = path.with_name(f".{sha256}.{secrets.token_hex(4)}.tmp")
    try:
        path.parent.mkdir(parents=True, exist_ok=True)
        descriptor = os.open(temporary, os.O_WRONLY | os.O_CREAT | os.O_EXCL, 0o600)
        with os.fdopen(descriptor, "wb") as file:
            file.write(content)
            file.flush()
            os.fsync(file.fileno())
        temporary.replace(path)
        _sync_folder(path.parent)
    except OSError as error:
        with suppress(OSError):
            temporary.unlink(missing_ok=True)
        raise StoreUnavailableError(
            f"The recording could not be kept in {folder}: {error.strerror}.",
            "Nothing was stored; check the disk and try again.",
        ) from error
    return KeptOriginal(sha256, len(content), path)


def drop_original_files(folder: Path, hashes: list[str]) -> None:
    """Delete originals that no row names any more."""
    for sha256 in hashes:
        get_original_path(folder, sha256).unlink(missing_ok=True)


def _sync_folder(folder: Path) -> None:
    """Make the new name itself durable."""
    descriptor = os.open(folder, os.O_RDONLY)
    try:
        os.fsync(descriptor)
    finally:
        os.close(descriptor)
