"""How the kernels are compiled: one decorator, and a machine-code cache that cannot go stale.

Numba's on-disk cache looks only at the file of the function itself, so a changed helper in another
file would leave old machine code in use. The cache folder is therefore named by a hash of every
source file of the package and of the versions that shape the code; any change starts a new folder.
"""

import hashlib
import os
from pathlib import Path

import numba
import numpy as np

PACKAGE = Path(__file__).resolve().parents[1]


def sources_hash(package: Path = PACKAGE) -> str:
    """Return a short hash of all ``*.py`` below `package` and of numba's and numpy's versions."""
    digest = hashlib.sha256(f"{numba.__version__} {np.__version__}".encode())
    for path in sorted(package.rglob("*.py")):
        digest.update(path.relative_to(package).as_posix().encode())
        digest.update(path.read_bytes())
    return digest.hexdigest()[:16]


def cache_folder() -> Path:
    """Return the folder of the machine code that belongs to these very sources."""
    root = Path(os.environ.get("XDG_CACHE_HOME") or Path.home() / ".cache")
    return root / "groundroll" / sources_hash()


numba.config.CACHE_DIR = str(cache_folder())

# `contract` lets a multiply and an add become one instruction. No reordering of sums is allowed:
# the marching orders must give the same bits. Without reference counts (`_nrt`) a group of arrays costs
# nothing to hand on; kernels allocate nothing anyway.
_OPTIONS = {"nogil": True, "fastmath": {"contract"}, "error_model": "numpy", "_nrt": False}

# A whole pass: what Python calls.
entry = numba.njit(cache=True, **_OPTIONS)
# A part of it, compiled into its caller: groups of arrays are then never copied onto the stack.
kernel = numba.njit(cache=True, forceinline=True, **_OPTIONS)
# An expression, inlined before types are known, so that the loop around it vectorises.
inline = numba.njit(inline="always", **_OPTIONS)
