"""The one decorator of every compiled function, with a compile cache that cannot serve stale code.

Numba's disk cache notices an edit to the file of a kernel but not an edit to a kernel it calls in another file.  The cache
therefore lives in a folder named by a hash of every source file that may hold a kernel: any edit means a new folder.
If neither the user's cache folder nor the package can be written to, a temporary folder is used.
"""

import hashlib
import os
import tempfile
from collections.abc import Callable
from pathlib import Path
from typing import Any, TypeVar

import numba

__all__ = ["cache_is_warm", "kernel", "part"]

_KERNEL_PACKAGES = ("grid", "physics", "stepping")
_F = TypeVar("_F", bound=Callable[..., Any])


def _kernel_sources_hash() -> str:
    """Hash of the sources of all kernels and of the compiler that turns them into machine code."""
    root = Path(__file__).parent
    digest = hashlib.sha256(f"{numba.__version__}".encode())
    for source in sorted([root / "compiling.py", *(p for k in _KERNEL_PACKAGES for p in (root / k).glob("*.py"))]):
        digest.update(source.name.encode())
        digest.update(source.read_bytes())
    return digest.hexdigest()[:16]


def _writable(folder: Path) -> bool:
    try:
        folder.mkdir(parents=True, exist_ok=True)
        probe = folder / f".write-{os.getpid()}"
        probe.touch()
        probe.unlink()
    except OSError:
        return False
    return True


def _cache_folder() -> Path:
    chosen = os.environ.get("OCEANBOX_CACHE_DIR")
    base = os.environ.get("XDG_CACHE_HOME")
    candidates = [Path(chosen)] if chosen else []
    candidates.append((Path(base) if base else Path.home() / ".cache") / "oceanbox")
    for candidate in candidates:
        folder = candidate / _kernel_sources_hash()
        if _writable(folder):
            return folder
    user = getattr(os, "getuid", lambda: "user")()
    return Path(tempfile.gettempdir()) / f"oceanbox-{user}" / _kernel_sources_hash()


CACHE_FOLDER = _cache_folder()
CACHE_FOLDER.mkdir(parents=True, exist_ok=True)
# The environment variable reaches worker processes; the config object reaches a numba that was imported before us.
os.environ["NUMBA_CACHE_DIR"] = str(CACHE_FOLDER)
numba.config.CACHE_DIR = str(CACHE_FOLDER)  # type: ignore[attr-defined]


def cache_is_warm() -> bool:
    """True if compiled kernels of exactly these sources are on disk, so that a run will not have to compile."""
    return any(CACHE_FOLDER.rglob("*.nbc"))


def kernel(function: _F) -> _F:
    """Compile ``function`` with numba.

    ``error_model='numpy'`` removes the zero-division test that stops vectorisation.  Only the contraction part of fast
    arithmetic is allowed: the parts that assume no NaN would blind the check for a run that blows up.
    """
    compile_it: Any = numba.njit(cache=True, error_model="numpy", fastmath={"contract"}, nogil=True)
    compiled: _F = compile_it(function)
    return compiled


def part(function: _F) -> _F:
    """As `kernel`, for a part of a kernel that is always compiled into its caller, so that its many arguments cost nothing."""
    compile_it: Any = numba.njit(cache=True, error_model="numpy", fastmath={"contract"}, nogil=True, forceinline=True)
    compiled: _F = compile_it(function)
    return compiled
