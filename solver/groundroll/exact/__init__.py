"""Exact and semi-analytic solutions of plane-strain P-SV waves: the truths that the mesh is measured by.

Nothing here knows of a mesh. x right, z down, free surface at z = 0; sources are lines (source.LineSource); a pulse
s(t) is dimensionless and starts at t = 0; every trace has shape (receiver, time), x and z components apart.

    fullspace    force, moment; elastic or lossy               closed form in frequency
    lamb         surface force, surface receivers; elastic     closed form in time
    garvin       buried explosion, surface receivers; elastic  closed form in time
    layered      any layers, depths, force, moment; lossy too  frequency-wavenumber sum
    rayleigh     speed, ellipticity, strength on a half-space  closed form
    modes        phase and group speed of layers               roots of a secular function
    column       vertical S or P waves through layers          closed form
    planewave    free surface and welded interface             closed form

Measured accuracy: relative L2 difference of velocity traces (both components), 20 Hz Ricker pulse that starts at 1e-8.
    layered and lamb, Vp/Vs 1.73 and 8, 0.5 to 36 wavelengths           4e-8 at most
    layered and garvin, depth 2 and 20 m, 0 to 300 m                    4e-7 at most (garvin's pulse derivative)
    layered and fullspace, 2 km deep, 1 to 200 m                        6e-7 at most
    layered and itself, damping, period, band, wavenumber end changed   1.2e-6 at most, mostly 2e-8
        (with weaker damping, which is the worse of the two; 0.5 m from the source, layers of 0.3 m, Q 20 to 200, a soft
        layer of vs 100 over rock of 2800 m/s, 40 wavelengths at Vp/Vs 8)
    layered, one wavenumber, and matrix exponentials of lossy layers    1e-9 at most
    fullspace and itself, as above, 0.1 to 300 m                        3e-8 at most
    modes, column, planewave, rayleigh and outside values               all their printed digits
A pulse that does not start near 0 (a Ricker delayed by 1/f starts at -1e-3) makes a jump: `layered` and `fullspace`
count it, `lamb` and `garvin` do not, and they then differ by about twice the jump.
"""
