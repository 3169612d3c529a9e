/* The same interior scheme as a plain compiled loop: all velocities, then all stresses, OpenMP over rows.
   No edges, sources or output. Called as PROGRAM NZ NX STEPS by benchmark.py; prints its rate in million
   cell-steps/s and the memory stream rate (GB/s) of the machine right after. */
#include <omp.h>
#include <stdio.h>
#include <stdlib.h>

enum { VX, VZ, XX, ZZ, XZ, BX, BZ, M, LAM, MU, FIELDS };

/* Derivative at the half point after entry i along stride s, and at the node entry i between half points. */
#define HALF(f, i, s) (75.f / 64 * (f[(i) + (s)] - f[i]) - 25.f / 384 * (f[(i) + 2 * (s)] - f[(i) - (s)]) \
                       + 3.f / 640 * (f[(i) + 3 * (s)] - f[(i) - 2 * (s)]))
#define NODE(f, i, s) HALF(f, (i) - (s), s)

int main(int argc, char **argv) {
    if (argc != 4) return 2;
    const long nz = atol(argv[1]), nx = atol(argv[2]), steps = atol(argv[3]), n = nz * nx;
    const float start[FIELDS] = {0, 0, 0, 0, 0, .1f, .1f, 1, .4f, .3f};
    float *a[FIELDS];
    for (int q = 0; q < FIELDS; q++) {
        a[q] = aligned_alloc(64, (n * sizeof(float) / 64 + 1) * 64);
#pragma omp parallel for schedule(static)
        for (long i = 0; i < n; i++) a[q][i] = start[q];
    }
    float *restrict vx = a[VX], *restrict vz = a[VZ], *restrict xx = a[XX], *restrict zz = a[ZZ], *restrict xz = a[XZ];
    const float *bx = a[BX], *bz = a[BZ], *m = a[M], *lam = a[LAM], *mu = a[MU];
    const double begin = omp_get_wtime();
    for (long step = 0; step < steps; step++) {
        xx[n / 2 + nx / 2] += 1;
#pragma omp parallel for schedule(static)
        for (long k = 3; k < nz - 3; k++)
#pragma omp simd
            for (long i = k * nx + 3; i < (k + 1) * nx - 3; i++) {
                vx[i] += bx[i] * (HALF(xx, i, 1) + NODE(xz, i, nx));
                vz[i] += bz[i] * (NODE(xz, i, 1) + HALF(zz, i, nx));
            }
#pragma omp parallel for schedule(static)
        for (long k = 3; k < nz - 3; k++)
#pragma omp simd
            for (long i = k * nx + 3; i < (k + 1) * nx - 3; i++) {
                const float ex = NODE(vx, i, 1), ez = NODE(vz, i, nx);
                xx[i] += m[i] * ex + lam[i] * ez;
                zz[i] += lam[i] * ex + m[i] * ez;
                xz[i] += mu[i] * (HALF(vz, i, 1) + HALF(vx, i, nx));
            }
    }
    const double seconds = omp_get_wtime() - begin;
    double best = 1e30;
    for (int repeat = 0; repeat < 3; repeat++) {
        const double t = omp_get_wtime();
#pragma omp parallel for schedule(static)
        for (long i = 0; i < n; i++) vx[i] = bx[i] + .5f * mu[i];
        if (omp_get_wtime() - t < best) best = omp_get_wtime() - t;
    }
    printf("rate %.1f stream %.2f check %g\n", n * (double)steps / seconds / 1e6, 3. * n * sizeof(float) / best / 1e9, vx[n / 2]);
    return 0;
}
