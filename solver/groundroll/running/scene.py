"""What the records say about the scene: receiver lines, sources, interfaces, travel-time guides, ground."""

import numpy as np

from groundroll.exact.rayleigh import speed_ratio
from groundroll.ground.model import GroundModel
from groundroll.records import ReceiverLine
from groundroll.running.plan import Plan
from groundroll.scenario import Receivers, Scenario

# The stored picture of the ground is thinned to about this many nodes a side.
GROUND_NODES = 1200


def positions(line: Receivers) -> np.ndarray:
    """Return (receiver, 2): x and depth as the scenario means it."""
    if line.at is not None:
        return np.array(line.at, dtype=float)
    return np.linspace(line.start, line.end, line.count)


def below_surface(x, depth, depth_from: str, model: GroundModel) -> np.ndarray:
    """Return depths (m) below the ground surface at `x`."""
    if depth_from == "surface":
        return np.asarray(depth, dtype=float)
    return np.asarray(depth) + model.surface_elevation(np.asarray(x, dtype=float))


def receiver_line(line: Receivers, model: GroundModel) -> ReceiverLine:
    x, depth = positions(line).T
    depth = below_surface(x, depth, line.depth_from, model)
    return ReceiverLine(name=line.name, x=x, depth=depth, elevation=model.surface_elevation(x) - depth)


def source_depth(source, model: GroundModel) -> float:
    return float(below_surface([source.x], [source.depth], source.depth_from, model)[0])


def guides(scenario: Scenario, model: GroundModel) -> list[dict]:
    """Return direct P, S and Rayleigh waves of the first source, at the speeds of the ground around it."""
    source = scenario.sources[0]
    depth, below = source_depth(source, model), 0.0
    for thickness, vp, vs, *_ in model.layers_under(source.x):
        below += thickness
        if depth < below:
            break
    pulse = source.pulse
    if pulse.file is not None:
        return []
    onset = (pulse.delay or 0.0) + (0.5 * pulse.duration if pulse.shape == "half_sine" else 0.0)
    speeds = {"P": vp, "S": vs, "Rayleigh": vs * speed_ratio(vp / vs)}
    return [{"wave": wave, "speed": float(c), "x0": source.x, "t0": onset} for wave, c in speeds.items()]


def describe(made: Plan) -> dict:
    """Return the arguments of `RecordsWriter.put_scene`; depths are below the datum."""
    scenario, model = made.scenario, made.model
    sources = [
        {
            "name": s.name,
            "kind": s.kind,
            "x": s.x,
            "depth": source_depth(s, model) - float(model.surface_elevation(np.array([s.x]))[0]),
        }
        for s in scenario.sources
    ]
    x = np.linspace(0.0, scenario.section.length, 401)
    elevation = model.surface_elevation(x)
    return {
        "title": scenario.title,
        "sources": sources,
        "interfaces": [{"x": list(map(float, px)), "depth": list(map(float, pz))} for px, pz in model.interfaces()],
        "guides": guides(scenario, model),
        "surface": {"x": x.tolist(), "depth": (-elevation).tolist()} if np.any(elevation) else None,
    }


def thinned(mesh) -> tuple[np.ndarray, np.ndarray]:
    """Return the rows and columns of the section, thinned, at which the ground is stored."""
    rows = np.arange(mesh.nz)[mesh.section_rows]
    columns = np.arange(mesh.nx)[mesh.section_columns]
    return rows[:: max(1, len(rows) // GROUND_NODES)], columns[:: max(1, len(columns) // GROUND_NODES)]


def ground_arrays(made: Plan, shown: dict[str, np.ndarray]) -> tuple:
    """Return the arguments of `RecordsWriter.put_ground`: the ground as the solver sees it (`OnMesh.shown`) and its mesh.

    Quality factors are left out where nothing damps. Points per wavelength count the wider of both spacings.
    """
    mesh = made.mesh
    rows, columns = thinned(mesh)
    whole = np.s_[np.ix_(rows, columns)]
    shown = {name: np.broadcast_to(values, (mesh.nz, mesh.nx))[whole] for name, values in shown.items()}
    spacing = np.broadcast_to(mesh.spacing * np.asarray(mesh.stretch(False, False)), (mesh.nz, mesh.nx))[whole]
    points = shown["vs"] / made.scenario.section.highest_frequency / np.maximum(spacing, mesh.spacing)
    arrays = {
        "vp": (shown["vp"], "m s-1", "P-wave speed on the mesh, along z"),
        "vs": (shown["vs"], "m s-1", "S-wave speed on the mesh"),
        "density": (shown["density"], "kg m-3", "density on the mesh"),
    }
    if made.losses is not None:
        arrays["qp"] = (shown["qp"], "1", "quality factor of P waves")
        arrays["qs"] = (shown["qs"], "1", "quality factor of S waves")
    arrays["spacing_z"] = (spacing, "m", "mesh spacing along z")
    arrays["points_per_wavelength"] = (points, "1", "mesh points per S wavelength at the highest frequency")
    elevation = mesh.node_elevation()
    if elevation is not None:
        elevation = elevation[np.ix_(rows, columns)]
    return arrays, mesh.x_node[columns], mesh.depth_node[rows], elevation
