"""The physics: mesh, operators, row kernels, edges, sources, receivers, marching order."""
