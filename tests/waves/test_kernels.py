"""The row kernels: compiled or not, fast or general, they say the same."""

import os
import platform
import re
import subprocess
import sys
from pathlib import Path

import numba
import numpy as np
import pytest
from llvmlite.binding import get_host_cpu_features
from numpy.testing import assert_allclose

import groundroll
from groundroll.waves import kernels, relaxation
from groundroll.waves.attenuation import Loss
from groundroll.waves.march import PLAIN, Order
from groundroll.waves.mesh import even_mesh
from groundroll.waves.simulation import PointSource

from .drive import FREE_TOP, FULL_SPACE, all_steps, interior, ricker, rough

STEPS = 12
FIELDS = 5
BELOW = PointSource(30.3, 20.0, ricker(60.0, 0.004), force=(2e5, 1e5))
FREE_SIDE = ("free", "absorb", "absorb", "rigid")


def _run(edges, dtype=np.float64, order=PLAIN, steps=STEPS, general=False, size=(34.0, 26.0)):
    mesh = even_mesh(1.0, *size, edges, 4)
    middle = (0.5 * size[0] + 0.3, 0.4 * size[1])
    sources = [
        PointSource(*middle, ricker(60.0, 0.004), force=(2e5, 1e5), moment=(1e5, 2e5, 3e5)),
        PointSource(10.4, 0.0, ricker(60.0, 0.004), force=(1e5, 1e5)),
    ]
    run = all_steps(mesh, rough(mesh, 400.0), 400.0, sources, [middle, (12.2, 0.0)], steps, dtype, order)
    if general:
        run.march.ground.rows.plain[:] = 0
    run.advance(steps)
    return run


def fields_of(edges, order) -> np.ndarray:
    """The end fields and traces of a small run, flat; the subprocess below calls it too."""
    run = _run(edges, order=order)
    return np.concatenate([*(f.ravel() for f in interior(run)), run.traces.ravel()])


def _shares(run):
    """Fields over their peaks, velocity and stress each over the largest of its kind."""
    fields = interior(run)
    speed, stress = (max(np.abs(f).max() for f in group) for group in (fields[:2], fields[2:]))
    return [f / speed for f in fields[:2]] + [f / stress for f in fields[2:]]


@pytest.mark.parametrize("edges", [FREE_TOP, FREE_SIDE], ids=["absorbing", "closed"])
@pytest.mark.parametrize("order", [PLAIN, Order(4, 20)], ids=["plain", "strips"])
def test_compiled_and_interpreted_agree(edges, order, tmp_path):
    """Numba fuses a multiply and an add, Python rounds twice: a few parts in 1e16 of the peak, 12 steps long."""
    file = tmp_path / "fields.npy"
    code = (
        "import numpy as np\n"
        "from tests.waves import test_kernels as t\n"
        "from groundroll.waves.march import Order\n"
        f"np.save({str(file)!r}, t.fields_of({edges!r}, {order!r}))\n"
    )
    here = Path(__file__).parents[2]
    source_root = Path(groundroll.__file__).parents[1]
    environment = dict(os.environ, NUMBA_DISABLE_JIT="1", PYTHONPATH=os.pathsep.join([str(source_root), str(here)]))
    subprocess.run([sys.executable, "-W", "error", "-c", code], check=True, env=environment, cwd=here, timeout=300)
    interpreted, compiled = np.load(file), fields_of(edges, order)
    assert np.abs(compiled).max() > 0.0
    size = (len(compiled) - STEPS * 4) // FIELDS
    for part in range(FIELDS):
        piece = slice(part * size, (part + 1) * size)
        assert_allclose(interpreted[piece], compiled[piece], rtol=1e-12, atol=1e-12 * np.abs(compiled[piece]).max())
    tail = slice(FIELDS * size, None)
    assert_allclose(interpreted[tail], compiled[tail], rtol=1e-12, atol=1e-12 * np.abs(compiled[tail]).max())


@pytest.mark.parametrize("edges", [FREE_TOP, FULL_SPACE], ids=["surface", "full space"])
@pytest.mark.parametrize(("dtype", "tolerance"), [(np.float64, 1e-13), (np.float32, 2e-5)])
def test_fast_and_general_kernels_agree(edges, dtype, tolerance):
    """Both sum the same products in another order: rounding only (40 steps; 100 units in the last place)."""
    size = (60.0, 50.0)
    fast = _run(edges, dtype, steps=40, size=size)
    general = _run(edges, dtype, steps=40, size=size, general=True)
    assert fast.march.ground.rows.plain.sum() > 10
    for a, b in zip(_shares(fast), _shares(general), strict=True):
        assert_allclose(a, b, rtol=0, atol=tolerance)


# Arithmetic in single precision as compiled code names it, by processor family: packed in wide registers, and scalar.
PACKED = {"x86_64": r"\bv?(?:fn?m(?:add|sub)\d*|mul|add|sub)ps\b.*%[{}]mm", "aarch64": r"\bf(?:mla|mls|mul|add|sub)\s+v\d+\.4s"}
SCALAR = {"x86_64": r"\bv?(?:fn?m(?:add|sub)\d*|mul|add|sub)ss\b", "aarch64": r"\bf(?:n?madd|n?msub|mul|add|sub)\s+s\d+"}
MACHINE = {"AMD64": "x86_64", "arm64": "aarch64"}.get(platform.machine(), platform.machine())


def counts(text) -> tuple[int, int]:
    """Packed instructions of wide registers (256 bits or more where the processor has them), and scalar ones."""
    wide = "yz" if get_host_cpu_features().get("avx", False) and MACHINE == "x86_64" else "x"
    return len(re.findall(PACKED[MACHINE].format(wide), text)), len(re.findall(SCALAR[MACHINE], text))


@pytest.mark.skipif(MACHINE not in PACKED, reason=f"no names of packed instructions known for {MACHINE}")
@pytest.mark.parametrize("name", ["fast_velocity", "fast_stress", "fast_lossy_normal", "fast_lossy_shear"])
def test_inner_loops_are_packed(name):
    """Each loop exists in packed form; what is scalar is the remainder of a row, each loop once more."""
    packed, scalar = counts(compiled(name, loss=name.startswith("fast_lossy")))
    assert packed >= scalar > 0


@pytest.mark.skipif(MACHINE not in PACKED, reason=f"no names of packed instructions known for {MACHINE}")
def test_a_running_sum_is_not_packed():
    """Mutation: what cannot be packed is counted as such."""

    @numba.njit
    def running(f):
        for i in range(1, len(f)):
            f[i] += f[i - 1] * f[i]

    running(np.ones(4, np.float32))
    packed, scalar = counts(running.inspect_asm(running.signatures[0]))
    assert packed == 0 and scalar > 0


def compiled(name, loss):
    """The machine code of a fast kernel in single precision."""
    mesh = even_mesh(1.0, 60.0, 50.0, FREE_TOP, 4)
    run = all_steps(mesh, rough(mesh, 400.0), 400.0, [], [], 1, np.float32, loss=small_loss() if loss else None)
    ground, fields = run.march.ground, run.march.fields
    m, one = ground.material, np.uint64(1)
    z = ground.rows.node[10] if loss else ground.rows.node[10:12]
    rest = {
        "fast_velocity": (z, z, fields, m.bx, m.bz),
        "fast_stress": (z, z, fields, m.c11, m.c13, m.c33, m.mu),
        "fast_lossy_normal": (z, fields, m.c11, m.c13, m.c33, ground.memory),
        "fast_lossy_shear": (z, fields, m.mu, ground.memory),
    }[name]
    arguments = (one, one, ground.frame.pitch, ground.columns.c, *rest)
    kernel = numba.njit(error_model="numpy", fastmath={"contract"}, _nrt=False)(getattr(kernels, name).py_func)
    kernel(*arguments)
    return kernel.inspect_asm(kernel.signatures[0])


def small_loss() -> Loss:
    omega = relaxation.band_frequencies(1.0, 100.0)
    some = np.ones((2, 1, 1))
    return Loss(omega, relaxation.shapes(omega, 1.0, 100.0), 0.1 * some, 0.1 * some, 0.1 * some)


def test_fast_kernels_are_what_ran():
    """Mutation of the test above: with the fast kernels' own coefficients a thousandth off, the two differ."""
    def spoilt(general):
        mesh = even_mesh(1.0, 60.0, 50.0, FREE_TOP, 4)
        run = all_steps(mesh, rough(mesh, 400.0), 400.0, [BELOW], [], 40)
        run.march.ground.rows.node[:] *= 1.001
        if general:
            run.march.ground.rows.plain[:] = 0
        run.advance(40)
        return run

    differences = [np.abs(a - b).max() for a, b in zip(_shares(spoilt(False)), _shares(spoilt(True)), strict=True)]
    assert max(differences) > 1e-5


@pytest.mark.parametrize("dtype", [np.float32, np.float64])
def test_even_bands_need_no_c33(dtype):
    """Where c33 = c11 the kernel reads one for the other: not a bit may change."""
    ends = []
    for even in (True, False):
        mesh = even_mesh(1.0, 60.0, 50.0, FREE_TOP, 4)
        run = all_steps(mesh, rough(mesh, 400.0), 400.0, [BELOW], [], 20, dtype)
        assert run.march.ground.material.even.any()
        if not even:
            run.march.ground.material.even[:] = 0
        run.advance(20)
        ends.append(interior(run))
    for a, b in zip(*ends, strict=True):
        np.testing.assert_array_equal(a, b)
