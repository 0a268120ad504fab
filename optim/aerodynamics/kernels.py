"""Where the compiled kernels are kept, and the one decorator that compiles them.

A cached caller keeps the old code of an edited function in another module, silently. So the
folder of the cache is named by a digest of all kernel sources, by the version and by the
processor, and it is set before numba is imported. With ``NUMBA_DISABLE_JIT=1`` the same functions
run uncompiled.
"""

from __future__ import annotations

import hashlib
import os
import platform
import tempfile
import warnings
from collections.abc import Callable
from functools import cache
from pathlib import Path
from typing import Any, TypeVar

import platformdirs

from optim import __version__

_Function = TypeVar("_Function", bound=Callable[..., Any])

DIGEST_CHARACTERS = 16
"""Length of the digest in the name of the cache folder; 64 bits are ample for one folder."""


@cache
def kernel_digest() -> str:
    """Return the SHA-256 digest of all sources of this room that hold kernels."""
    digest = hashlib.sha256()
    for source in sorted(Path(__file__).parent.glob("*.py")):
        text = source.read_bytes()
        if b"njit" in text:
            digest.update(source.name.encode())
            digest.update(text)
    return digest.hexdigest()


def _usable(folder: Path) -> bool:
    """Whether files can be made in `folder`, which is created if need be."""
    try:
        folder.mkdir(parents=True, exist_ok=True)
        with tempfile.TemporaryFile(dir=folder):
            return True
    except OSError:
        return False


@cache
def cache_folder() -> Path | None:
    """Return the folder of the compiled kernels; None if there is nowhere to keep them."""
    mine = f"{kernel_digest()[:DIGEST_CHARACTERS]}-{platform.machine()}"
    kept = Path(platformdirs.user_cache_dir("sectionwright")) / __version__ / mine
    if _usable(kept):
        return kept
    private = Path(tempfile.gettempdir()) / f"sectionwright-{os.getuid()}" / mine
    if _usable(private) and private.stat().st_uid == os.getuid():
        warnings.warn(f"The kernels are kept in {private}: {kept} cannot be written.", stacklevel=2)
        return private
    warnings.warn("The kernels are compiled at each start: no folder can be written.", stacklevel=2)
    return None


if (_folder := cache_folder()) is not None:
    os.environ["NUMBA_CACHE_DIR"] = str(_folder)

import numba  # noqa: E402  (the folder above must be set first)

if _folder is not None:
    numba.config.CACHE_DIR = str(_folder)


def njit(function: _Function) -> _Function:
    """Compile `function` on first use, keep the result, and keep IEEE arithmetic."""
    compiled: _Function = numba.njit(cache=_folder is not None, error_model="numpy")(function)
    return compiled
