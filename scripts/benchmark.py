"""Speed of the marching orders, as ratios in one run on one machine: a table and benchmark.json.

Rates in million cell-steps/s, medians of several repeats taken in turn, after warm-up:
    plain      the plain order: all bands of a stage, then all of the next
    fast       the fast order, as `groundroll run` uses it, with absorbing edges, a source, 50 receivers
    run        the time loop of a whole `groundroll run`, files and snapshots every 200 steps included
    numpy      the same interior scheme by NumPy slices
    c          a plain C/OpenMP loop of the same order without edges or output, compiled on the spot if a
               compiler is there (or a program given by --peer that prints the same line)
and the memory stream rate, which bounds every order that streams each array once a step.
"""

import argparse
import json
import shutil
import statistics
import subprocess
import tempfile
import time
from pathlib import Path

import numpy as np

from groundroll import Scenario, run
from groundroll.running.choices import time_step
from groundroll.running.machine import available_threads
from groundroll.waves import pulses, relaxation
from groundroll.waves.assembly import EdgeDamping, Properties
from groundroll.waves.attenuation import Loss
from groundroll.waves.cell import INTERIOR
from groundroll.waves.march import PLAIN
from groundroll.waves.mesh import even_mesh, with_terrain
from groundroll.waves.simulation import Clock, PointSource, Simulation

# Bytes that streaming each of 10 arrays once per step takes: 5 fields read and written, 5 properties read.
STREAMED_BYTES = 60
C_SOURCE = Path(__file__).with_name("plain_loop.c")


def uniform() -> Properties:
    one = np.ones((1, 1))
    m, mu = 1800.0 * 400.0**2 * one, 1800.0 * 200.0**2 * one
    return Properties(1800.0 * one, 1800.0 * one, m, m - 2.0 * mu, m, mu)


def losses() -> Loss:
    omega = relaxation.band_frequencies(0.5, 50.0, 4)
    shape = np.moveaxis(relaxation.shape_coefficients(np.full((1, 1), 20.0), omega, 0.5, 50.0), -1, 0)
    return Loss(omega, relaxation.shapes(omega, 0.5, 50.0), shape, shape, shape)


class Case:
    """A simulation of nz x nx cells that can be timed again and again."""

    def __init__(self, nz, nx, threads, dtype=np.float32, order=None, lossy=False, hilly=False):
        mesh = even_mesh(1.0, nx - 41, nz - 21, ("absorb", "absorb", "free", "absorb"), 20)
        if hilly:
            k = 6.0 * np.pi / nx
            inside = lambda x: ((x > 0) & (x < nx - 41)).astype(float)  # noqa: E731
            mesh = with_terrain(mesh, lambda x: 8.0 * np.sin(k * x) ** 2 * inside(x), lambda x: 8.0 * k * np.sin(2 * k * x) * inside(x))
        dt = time_step(mesh, 450.0)
        source = PointSource(0.5 * nx, 0.3 * nz, lambda t: pulses.ricker(t, 20.0, 0.075), moment=(1e5, 1e5, 0.0))
        points = [(x, 0.0) for x in np.linspace(30.0, nx - 80.0, 50)]
        chosen = {} if order is None else {"order": order}
        clock = Clock(dt, 4000, 1.0, 60.0)
        self.simulation = Simulation(mesh, uniform(), EdgeDamping(450.0, 60.0), clock, [source], points, dtype, threads=threads, loss=losses() if lossy else None, **chosen)
        self.simulation.warm_up()
        self.cells = mesh.cells

    def rate(self, seconds: float = 1.0) -> float:
        """Return million cell-steps/s over about `seconds`."""
        chunk = max(8, int(5e7 / self.cells))
        done, start = 0, time.perf_counter()
        while time.perf_counter() - start < seconds:
            if self.simulation.step + chunk > self.simulation.clock.steps:
                self.simulation.march.step = 0
            self.simulation.advance(chunk)
            done += chunk
        return self.cells * done / (time.perf_counter() - start) / 1e6


class WholeRun:
    """The time loop of `groundroll run` on about nz x nx cells with snapshots every 200 steps, written to files."""

    def __init__(self, nz: int, nx: int, threads: int, steps: int = 2000):
        dt = 0.95 * 0.5695 / 400.0
        self.threads = threads
        self.scenario = Scenario.from_text(f"""
[section]
length = {nx - 41}.0
depth = {nz - 21}.0
duration = {steps * dt}
highest_frequency = 20.0
[mesh]
spacing = 1.0
[[ground.layer]]
vp = 400.0
vs = 200.0
density = 1800.0
[[source]]
name = "blast"
kind = "explosion"
x = {0.5 * nx}
depth = {0.3 * nz}
moment = 1e5
pulse = {{ shape = "ricker", frequency = 10.0 }}
[[receivers]]
name = "line"
from = [30.0, 0.0]
to = [{nx - 80}.0, 0.0]
count = 50
[snapshots]
every = {200 * dt}
""")

    def rate(self) -> float:
        """Return million cell-steps/s of the loop: stepping, snapshots, ledger, seismograms."""
        with tempfile.TemporaryDirectory() as folder:
            records = run(self.scenario, out=Path(folder) / "run", threads=self.threads)
            told = records.provenance
        return told["mesh_cells"] * told["steps"] / (told["stepping_seconds"] + told["recording_seconds"]) / 1e6


def numpy_rate(nz: int, nx: int) -> float:
    """The interior scheme by NumPy slices, one thread."""
    vx, vz, sxx, szz, sxz = (np.zeros((nz, nx), np.float32) for _ in range(5))
    b, m, lam, mu = (np.full((nz, nx), c, np.float32) for c in (0.1, 1.0, 0.4, 0.3))
    inner = (slice(3, -3), slice(3, -3))

    def d(f, axis, half):
        def at(shift):
            part = [slice(3, -3), slice(3, -3)]
            part[axis] = slice(3 + shift, f.shape[axis] - 3 + shift)
            return f[tuple(part)]

        return sum(np.float32(c) * (at(r + half) - at(half - 1 - r)) for r, c in enumerate(INTERIOR))

    start, steps = time.perf_counter(), 3
    for _ in range(steps):
        vx[inner] += b[inner] * (d(sxx, 1, 1) + d(sxz, 0, 0))
        vz[inner] += b[inner] * (d(sxz, 1, 0) + d(szz, 0, 1))
        ex, ez = d(vx, 1, 0), d(vz, 0, 0)
        sxx[inner] += m[inner] * ex + lam[inner] * ez
        szz[inner] += lam[inner] * ex + m[inner] * ez
        sxz[inner] += mu[inner] * (d(vz, 1, 1) + d(vx, 0, 1))
    return nz * nx * steps / (time.perf_counter() - start) / 1e6


def compiled_loop(peer: Path | None, folder: Path) -> Path | None:
    """Return the C program, compiled here if there is a compiler."""
    if peer is not None:
        return peer.resolve()
    compiler = next(filter(None, map(shutil.which, ("gcc", "clang", "cc"))), None)
    if compiler is None:
        return None
    program = folder / "plain_loop"
    command = [compiler, "-O3", "-march=native", "-ffast-math", "-fopenmp", str(C_SOURCE), "-o", str(program), "-lm"]
    return program if subprocess.run(command, capture_output=True).returncode == 0 else None


def c_rate(program: Path, nz: int, nx: int, threads: int) -> tuple[float, float]:
    """Return (million cell-steps/s, stream rate GB/s) of the C program."""
    steps = max(10, int(2.5e8 / (nz * nx)))
    words = subprocess.run(
        [str(program), str(nz), str(nx), str(steps)], capture_output=True, text=True, check=True, env={"OMP_NUM_THREADS": str(threads)}
    ).stdout.split()
    return float(words[1]), float(words[3])


def compare(nz, nx, threads, repeats, program) -> dict:
    """Time everything in turn at one size, and return medians."""
    kinds = {
        "fast": Case(nz, nx, threads),
        "fast, attenuation": Case(nz, nx, threads, lossy=True),
        "fast, terrain": Case(nz, nx, threads, hilly=True),
        "fast, double": Case(nz, nx, threads, np.float64),
        "plain, 1 thread": Case(nz, nx, 1, order=PLAIN),
        "run": WholeRun(nz, nx, threads),
    }
    found = {name: [] for name in kinds} | {"numpy": [numpy_rate(nz, nx)], "c": [], "stream GB/s": []}
    for _ in range(repeats):
        for name, case in kinds.items():
            found[name].append(case.rate())
            if name == "fast" and program is not None:
                rate, stream = c_rate(program, nz, nx, threads)
                found["c"].append(rate)
                found["stream GB/s"].append(stream)
    return {name: statistics.median(values) for name, values in found.items() if values}


def main() -> None:
    options = argparse.ArgumentParser(description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    options.add_argument("--size", type=int, nargs=2, default=(2000, 4000), metavar=("NZ", "NX"))
    options.add_argument("--threads", type=int, default=available_threads())
    options.add_argument("--repeats", type=int, default=5)
    options.add_argument("--peer", type=Path, help="a compiled C loop to compare with, called as PEER NZ NX STEPS")
    options.add_argument("--sizes", action="store_true", help="also: how the rate changes with the size of the grid")
    options.add_argument("--out", type=Path, default=Path("outputs/benchmark.json"))
    asked = options.parse_args()
    with tempfile.TemporaryDirectory() as folder:
        program = compiled_loop(asked.peer, Path(folder))
        rates = compare(*asked.size, asked.threads, asked.repeats, program)
    print(f"{asked.size[0]} x {asked.size[1]} cells, {asked.threads} threads, medians of {asked.repeats}; million cell-steps/s")
    for name, value in rates.items():
        print(f"  {name:20s} {value:8.1f}")
    result = {"size": asked.size, "threads": asked.threads, "rates": rates, "ratios": ratios(rates)}
    for name, value in result["ratios"].items():
        print(f"  {name:44s} {value:6.2f}")
    if asked.sizes:
        result["sizes"] = {}
        for nz, nx in ((64, 64), (128, 256), (500, 1000), (1000, 2000), (2000, 4000), (4000, 8000)):
            rate = statistics.median(Case(nz, nx, asked.threads).rate() for _ in range(3))
            result["sizes"][f"{nz} x {nx}"] = rate
            print(f"  fast at {nz} x {nx}: {rate:.1f}", flush=True)
    asked.out.parent.mkdir(parents=True, exist_ok=True)
    asked.out.write_text(json.dumps(result, indent=1))


def ratios(rates: dict) -> dict:
    fast = rates["fast"]
    found = {f"fast over {name}": fast / rates[name] for name in ("c", "plain, 1 thread", "numpy") if name in rates}
    if "c" in rates:
        found["run over c"] = rates["run"] / rates["c"]
    if "stream GB/s" in rates:
        found["fast over streaming each array once"] = fast / (rates["stream GB/s"] * 1e3 / STREAMED_BYTES)
    found["attenuation over elastic"] = rates["fast, attenuation"] / fast
    found["terrain over level"] = rates["fast, terrain"] / fast
    return found


if __name__ == "__main__":
    main()
