"""Compiling the entry kernels so that numba's cache is used, and never a stale one."""

import hashlib
from collections.abc import Callable
from functools import cache
from pathlib import Path

from numba import config, njit


@cache
def kernel_digest() -> str:
    """SHA-256 of the sources of this package, hexadecimal: the kernel's version."""
    digest = hashlib.sha256()
    for path in sorted(Path(__file__).parent.glob("*.py")):
        digest.update(path.read_bytes())
    return digest.hexdigest()


def compiled(function: Callable) -> Callable:
    """The compiled form of an entry kernel, kept in numba's cache; the plain function with NUMBA_DISABLE_JIT=1.

    numba does not notice edits in other files: every entry kernel closes over `kernel_digest()`, which is thereby part
    of the cache key. Where no folder can be written, nothing is cached.
    """
    if config.DISABLE_JIT:  # type: ignore[attr-defined]
        return function
    try:
        return njit(cache=True, nogil=True, error_model="numpy")(function)
    except RuntimeError:
        return njit(nogil=True, error_model="numpy")(function)
