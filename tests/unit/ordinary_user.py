"""Permissions bind everybody but the superuser, so a superuser's test run steps down for a while."""

from __future__ import annotations

import os
import stat
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

NOBODY = 65534


@contextmanager
def as_ordinary_user(*folders: Path) -> Iterator[None]:
    """Own `folders` and act as an ordinary user until the block ends."""
    if os.geteuid() != 0:
        yield
        return
    for folder in folders:
        os.chown(folder, NOBODY, -1)
    os.seteuid(NOBODY)
    try:
        yield
    finally:
        os.seteuid(0)


@contextmanager
def reachable(folder: Path) -> Iterator[Path]:
    """A new folder in `folder` that an ordinary user reaches until the block ends."""
    parents = [parent for parent in [folder, *folder.parents] if not parent.stat().st_mode & stat.S_IXOTH]
    modes = [stat.S_IMODE(parent.stat().st_mode) for parent in parents]
    for parent in parents:
        parent.chmod(0o755)
    inner = folder / "home"
    inner.mkdir()
    try:
        yield inner
    finally:
        inner.chmod(0o755)
        for parent, mode in zip(parents, modes, strict=True):
            parent.chmod(mode)
