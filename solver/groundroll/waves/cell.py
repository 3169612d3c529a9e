"""The staggered cell, drawn once.

Axes: x (column i) to the right, z (row k) DOWN; h is the spacing along a column or row index.
Row 0 lies ON the ground surface, column 0 on the left end of the mesh.

              column i          column i + 1/2
    row k      T = sxx, szz      vx                 node row
    row k+1/2  vz                sxz                half row

Array entry [k, i] holds  sxx, szz at (x_i,       z_k)        "node"
                          vx       at (x_i + h/2, z_k)
                          vz       at (x_i,       z_k + h/2)
                          sxz      at (x_i + h/2, z_k + h/2).

Time: stress at whole steps n, velocity at half steps n + 1/2.
Memory: row after row (x runs fastest), each field a flat array with a margin of zeros around the mesh:
entry [k, i] is flat[(k + MARGIN_ROWS) * pitch + MARGIN_COLUMNS + i].

The four one-dimensional derivative operators, named alike along x and z:
    NODE_STRAIN   half -> node, acts on velocity    (vx along x, vz along z)
    HALF_STRAIN   node -> half, acts on velocity    (vz along x, vx along z)
    NODE_MOMENTUM half -> node, acts on stress      (sxz along x for vz, sxz along z for vx)
    HALF_MOMENTUM node -> half, acts on stress      (sxx along x for vx, szz along z for vz)
"""

# Eight taps from two rows above the last half row end five rows below the mesh.
MARGIN_ROWS = 5
MARGIN_COLUMNS = 16

NODE_STRAIN, HALF_STRAIN, NODE_MOMENTUM, HALF_MOMENTUM = 0, 1, 2, 3
OPERATORS = (NODE_STRAIN, HALF_STRAIN, NODE_MOMENTUM, HALF_MOMENTUM)

# 6th-order staggered first derivative (spacing 1): f'(0) = sum c_j (f(j - 1/2) - f(1/2 - j)).
INTERIOR = (75.0 / 64.0, -25.0 / 384.0, 3.0 / 640.0)

# Columns by which one stage reaches beyond the cell it updates, on level ground and under terrain.
REACH, TERRAIN_REACH = 3, 4
# Entries of a cache line in single precision: where rows of the fast kernels begin and end, for speed alone.
ALIGNED = 16
# Rows per band: the row kernels advance two rows at once, which shares loads between them.
BAND = 2
# Rows of scratch that the general kernels work in.
SCRATCH_ROWS = 7
# Relaxation mechanisms of the attenuation.
MECHANISMS = 4
