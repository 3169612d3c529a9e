"""The table a run ends with: peak motion per receiver line."""

import numpy as np

from groundroll.motion.derivative import differentiate
from groundroll.motion.peaks import peak_motion
from groundroll.records import Records


def line_velocity(line) -> tuple[np.ndarray, np.ndarray]:
    """Return both velocity components (receiver, time), differentiated from displacement if need be."""
    if "velocity_x" in line.arrays:
        return line.velocity_x, line.velocity_z
    if "displacement_x" in line.arrays:
        interval = line.time[1] - line.time[0]
        return differentiate(line.displacement_x, interval), differentiate(line.displacement_z, interval)
    return None


def peaks_table(records: Records) -> str:
    """Return a table of the greatest peak velocity and acceleration (resultant) on each receiver line."""
    rows = [("receivers", "x of peak (m)", "peak velocity (mm/s)", "peak acceleration (m/s2)")]
    for name, line in records.seismograms.items():
        interval = line.time[1] - line.time[0]
        velocity = line_velocity(line)
        if velocity is None:
            acceleration = (line.acceleration_x, line.acceleration_z)
            peak_a = peak_motion(line.time, *acceleration).resultant
            rows.append((name, f"{line.x[peak_a.argmax()]:.1f}", "not kept", f"{peak_a.max():.4g}"))
            continue
        peak_v = peak_motion(line.time, *velocity).resultant
        peak_a = peak_motion(line.time, *(differentiate(v, interval) for v in velocity)).resultant
        rows.append((name, f"{line.x[peak_v.argmax()]:.1f}", f"{1e3 * peak_v.max():.4g}", f"{peak_a.max():.4g}"))
    widths = [max(len(row[c]) for row in rows) for c in range(4)]
    return "\n".join("  ".join(cell.ljust(w) for cell, w in zip(row, widths, strict=True)).rstrip() for row in rows)
