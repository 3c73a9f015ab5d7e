"""Internal impedance of round wires by mpmath, 30 digits: Z = γ I0(γa) / (2πaσ I1(γa)), γ = sqrt(jωμ0σ).

Run: python3 tests/data/internal_impedance.py > tests/data/internal_impedance.csv
"""
import sys

import mpmath as mp

mp.mp.dps = 30
MU0 = mp.mpf(4) * mp.pi / 10**7
print("# mpmath %s, %d digits; mu0 = 4 pi 1e-7 H/m" % (mp.__version__, mp.mp.dps))
print("radius_m,conductivity_s_per_m,frequency_hz,resistance_ohm_per_m,reactance_ohm_per_m")
for radius in ["0.00005", "0.0004", "0.001", "0.00255", "0.007", "0.025"]:
    for sigma in ["1.39e6", "34.8e6", "58e6"]:
        for frequency in ["50", "10e3", "136e3", "1.8e6", "7.1e6", "28.4e6", "60e6"]:
            a, s, w = mp.mpf(radius), mp.mpf(sigma), 2 * mp.pi * mp.mpf(frequency)
            gamma = mp.sqrt(mp.mpc(0, w * MU0 * s))
            x = gamma * a
            # the ratio by its continued fraction where the functions themselves would overflow is not needed: mpmath scales
            z = gamma / (2 * mp.pi * a * s) * mp.besseli(0, x) / mp.besseli(1, x)
            print("%s,%s,%s,%s,%s" % (radius, sigma, frequency, mp.nstr(z.real, 17), mp.nstr(z.imag, 17)))
