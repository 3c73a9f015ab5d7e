#!/usr/bin/env python3
"""Half-space potentials by arbitrary-precision quadrature, as reference data for the tests.

Writes halfspace_reference.json beside this file. Needs mpmath. The formulas are the reflection and transmission
coefficients of the transmission-line analogue, not the reduced ones of the program; the path is a detour through the
first quadrant (the program stays on the real axis and substitutes); each integral is made twice, with two Gauss
orders, and their difference is recorded.
"""
import json
import os
import sys

import mpmath as mp

DIGITS = 20
ORDERS = (14, 18)
RADIANS = 9
DEPTH = 40  # exponentials are cut at e^-40

mp.mp.dps = DIGITS
C0 = mp.mpf(299792458)
MU0 = 4 * mp.pi * mp.mpf(10) ** -7
EPS0 = 1 / (MU0 * C0**2)

SOILS = {
    "very dry": (3, "1e-4"),
    "average": (13, "5e-3"),
    "wet": (30, "1e-2"),
    "lossless": (5, "0"),
    "sea": (70, "5"),
}
FREQUENCIES = ["1e4", "4.75e5", "1.8e6", "7.1e6", "2.84e7", "6e7"]
PAIRS = [
    (0.0004, 0, 0), (0.0004, 0.001, 0.001), (0.003, 0.003, 0.003), (0.1, 0.01, 0.02), (1, 0.03, 0.03), (10, 0.03, 5),
    (30, 9, 9), (100, 0.01, 60), (300, 0, 0), (300, 20, 60), (0, 0.01, 0.02), (5, 60, 60), (0.02, 0, 3),
    (0.0004, -0.05, -0.05), (0.007, -0.001, -0.5), (0, -3, -1), (1, -0.1, -0.1), (10, -0.3, -1.5), (100, -0.05, -0.05),
    (300, -1e-9, -3), (0.3, -1e-9, -1e-9),
    (0.0004, 0, -0.001), (0.007, 0.01, -0.01), (0, 1, -1), (1, 0.03, -0.3), (10, 9, -0.1), (100, 0.5, -1.5),
    (300, 60, -3), (2, -0.1, 0),
]


def gauss(n):
    nodes = []
    for i in range(n):
        x = mp.cos(mp.pi * (i + mp.mpf(3) / 4) / (n + mp.mpf(1) / 2))
        for _ in range(8):
            before, value = mp.mpf(0), mp.mpf(1)
            for k in range(n):
                before, value = value, ((2 * k + 1) * x * value - k * before) / (k + 1)
            slope = n * (x * value - before) / (x * x - 1)
            x -= value / slope
        nodes.append((x, 2 / ((1 - x * x) * slope**2)))
    return nodes


RULES = {n: gauss(n) for n in ORDERS}


class Case:
    def __init__(self, f, eps_r, sigma, rho, z, zs):
        omega = 2 * mp.pi * mp.mpf(f)
        self.k0 = omega / C0
        self.n2 = mp.mpc(eps_r, -mp.mpf(sigma) / (omega * EPS0))
        self.k1 = self.k0 * mp.sqrt(self.n2)
        self.rho, self.z, self.zs = mp.mpf(str(rho)), mp.mpf(str(z)), mp.mpf(str(zs))
        self.up = max(self.z, 0) + max(self.zs, 0)
        self.down = -min(self.z, 0) - min(self.zs, 0)
        self.zeta = self.up + self.down
        pole = self.k1 / mp.sqrt(self.n2 + 1)
        self.singular = [self.k0, self.k1, pole]

    def spectral(self, lam):
        """K_xx, K_zz, K_phi (less the direct term) and P, times lambda, without Bessel functions."""
        k0, k1, n2 = self.k0, self.k1, self.n2
        u0, u1 = mp.sqrt(lam**2 - k0**2), mp.sqrt((lam - k1) * (lam + k1))
        e = mp.exp(-u0 * self.up - u1 * self.down) * lam
        te, tm = (u0 - u1) / (u0 + u1), (u1 - n2 * u0) / (u1 + n2 * u0)
        p = (te - tm) / lam**2
        if self.z >= 0 and self.zs >= 0:
            q = (u0**2 * tm + k0**2 * te) / lam**2
            zz = (u0**2 * q - lam**2 * tm) / k0**2
            return [te / u0 * e, zz / u0 * e, q / u0 * e, p * e]
        if self.z < 0 and self.zs < 0:
            te, tm = -te, -tm
            q = (u1**2 * tm + k1**2 * te) / lam**2
            zz = (u1**2 * q - lam**2 * tm) / k1**2
            return [te / u1 * e, zz / u1 * e, q / (u1 * n2) * e, p * e]
        q = 2 * (u0 * u1 / (n2 * u0 + u1) + k0**2 / (u0 + u1)) / lam**2
        zz = 2 * (lam**2 - u0 * u1) / ((n2 * u0 + u1) * k0**2)
        return [2 / (u0 + u1) * e, zz * e, q * e, p * e]

    def values(self, lam, wave):
        z = lam * self.rho
        if wave == 0:
            b0, b1 = mp.besselj(0, z), mp.besselj(1, z)
        elif wave == 1:
            b0, b1 = mp.hankel1(0, z) / 2, mp.hankel1(1, z) / 2
        else:
            b0, b1 = mp.hankel2(0, z) / 2, mp.hankel2(1, z) / 2
        xx, zz, phi, p = self.spectral(lam)
        return [xx * b0, zz * b0, phi * b0, -lam * p * b1]

    def segment(self, start, end, wave, order):
        length = abs(end - start)
        way = (end - start) / length
        sums, at = [mp.mpc(0)] * 4, mp.mpf(0)
        extra = [mp.mpf(0)] if wave else []
        while at < length:
            here = start + way * at
            near = min(abs(here - s) for s in self.singular + extra)
            step = min(near * mp.mpf("0.7"), RADIANS / (self.rho + self.zeta), length - at)
            for x, w in RULES[order]:
                lam = here + way * step * (1 + x) / 2
                for i, v in enumerate(self.values(lam, wave)):
                    sums[i] += v * w * step / 2 * way
            at += step
        return sums

    def integral(self, order):
        rho, k0, k1 = self.rho, self.k0, self.k1
        hankel = self.zeta < 2 * rho
        faint = hankel and -mp.im(k1) * rho > 90
        reach = k0 if faint else mp.re(k1)
        height = min(k0, 6 / (rho + self.zeta))
        turn = mp.mpc(reach + height, height)
        parts = []
        if hankel:
            end = turn.real + max(3 * height, 2 / rho)
            up, down = mp.mpc(end, DEPTH / rho), mp.mpc(end, -DEPTH / rho)
            parts = [(mp.mpc(end), up, 1), (mp.mpc(end), down, 2)]
        else:
            slow = reach if self.down == 0 else abs(k1)
            end = mp.sqrt((slow + height) ** 2 + (DEPTH / self.zeta) ** 2) + height
        parts += [(mp.mpc(0), mp.mpc(height, height), 0), (mp.mpc(height, height), turn, 0), (turn, mp.mpc(end), 0)]
        total = [mp.mpc(0)] * 4
        for start, stop, wave in parts:
            if abs(stop - start) > 0:
                total = [a + b for a, b in zip(total, self.segment(start, stop, wave, order))]
        return total

    def potentials(self):
        coarse, fine = self.integral(ORDERS[0]), self.integral(ORDERS[1])
        distance = mp.sqrt(self.rho**2 + (self.z - self.zs) ** 2)
        spread = max(abs(a - b) for a, b in zip(coarse, fine)) * distance
        if (self.z >= 0) == (self.zs >= 0):
            k = self.k0 if self.z >= 0 else self.k1
            direct = mp.exp(-1j * k * distance) / distance
            scale = 1 if self.z >= 0 else 1 / self.n2
            fine = [fine[0] + direct, fine[1] + direct, fine[2] + direct * scale, fine[3]]
        return fine, spread


def pairs_of(value):
    return [float(mp.re(value)), float(mp.im(value))]


def chosen():
    number = 0
    for s, soil in enumerate(SOILS):
        for f, frequency in enumerate(FREQUENCIES):
            for p, pair in enumerate(PAIRS):
                if (p + 2 * s + 3 * f) % 4 == 0:
                    number += 1
                    yield number, soil, frequency, pair


def one(task):
    _, soil, frequency, (rho, z, zs) = task
    eps_r, sigma = SOILS[soil]
    (xx, zz, phi, p_rho), spread = Case(frequency, eps_r, sigma, rho, z, zs).potentials()
    return {
        "frequency_hz": float(frequency), "permittivity": eps_r, "conductivity_s_per_m": float(sigma),
        "rho_m": rho, "z_m": z, "z_source_m": zs,
        "xx": pairs_of(xx), "zz": pairs_of(zz), "phi": pairs_of(phi), "p_rho": pairs_of(p_rho),
        "order_difference_times_distance": float(spread),
    }


def main():
    points = []
    for task in chosen():
        points.append(one(task))
        print(task[0], points[-1]["order_difference_times_distance"], task[1:], file=sys.stderr, flush=True)
    settings = {
        "program": "mpmath", "version": mp.__version__, "backend": mp.libmp.BACKEND, "decimal_digits": DIGITS, "gauss_orders": list(ORDERS),
        "radians_per_panel": RADIANS, "cut_exponent": DEPTH,
        "convention": "e^{+jwt}; K in 1/m, direct term e^{-jkR}/R; p_rho = dP/drho; z >= 0 is air",
    }
    path = os.path.join(os.path.dirname(os.path.abspath(__file__)), "halfspace_reference.json")
    with open(path, "w", encoding="utf-8") as out:
        out.write('{"settings": ' + json.dumps(settings) + ',\n "points": [\n')
        out.write(",\n".join("  " + json.dumps(p) for p in points))
        out.write("\n]}\n")


if __name__ == "__main__":
    main()
