#!/usr/bin/env python3
"""Makes friction.json: conveyances, their derivatives and velocity coefficients to 40 digits, printed to 25.

The laws are written here as they stand in the literature (Manning, Chezy, Colebrook and White with D = 4R, Horton and Einstein,
Pavlovskii, division into zones), evaluated in mpmath at 60 digits on the very float64 numbers that the tests use. Roots are found by
bisection, derivatives by central differences at 150 digits: other routes than those of the program under test.

    python3 friction.py > friction.json
"""
import json
import random

from mpmath import mp, mpf, log10, sqrt, diff, power

mp.dps = 60
random.seed(20261201)


def spread(low, high):
    """A float64 spread evenly over orders of magnitude, as mpf and as the number itself."""
    return float(10 ** random.uniform(low, high))


def text(x):
    return mp.nstr(x, 25, strip_zeros=False)


def geometry(scale_low=-3, scale_high=2):
    a, p = spread(2 * scale_low, 2 * scale_high), spread(scale_low, scale_high)
    return {"area": a, "perimeter": p, "top_width": spread(scale_low, scale_high), "perimeter_rate": spread(-1, 1)}


def along(g):
    """Area and perimeter as functions of a small rise t of the depth, with the rates that the geometry states."""
    return (lambda t: mpf(g["area"]) + mpf(g["top_width"]) * t), (lambda t: mpf(g["perimeter"]) + mpf(g["perimeter_rate"]) * t)


def rate(f):
    with mp.workdps(150):
        h = mpf(10) ** -45
        return (f(h) - f(-h)) / (2 * h)


def entry(f):
    with mp.workdps(60):
        value = f(mpf(0))
    return text(value), text(rate(f))


def two_thirds(x):
    return power(x, mpf(2) / 3)


def colebrook_slope(g, ks, nu, grav, s):
    A, P = along(g)
    ks, nu, grav, s = mpf(ks), mpf(nu), mpf(grav), mpf(s)

    def k(t):
        r = A(t) / P(t)
        w = sqrt(8 * grav * r * s)
        v = -2 * w * log10(ks / (mpf("14.8") * r) + mpf("2.51") * nu / (4 * r * w))
        return A(t) * v / sqrt(s)
    return k


def factor(relative, reynolds):
    """f of Colebrook and White by bisection on x = 1/sqrt(f)."""
    a, b = relative / mpf("3.7"), mpf("2.51") / reynolds
    low, high = mpf(0), (1 - a) / b
    for _ in range(int(mp.prec) + 40 + max(0, int(mp.log(high + 1, 2)))):
        mid = (low + high) / 2
        if mid + 2 * log10(a + b * mid) > 0:
            high = mid
        else:
            low = mid
    return 1 / ((low + high) / 2) ** 2


def colebrook_discharge(g, ks, nu, grav, q):
    A, P = along(g)
    ks, nu, grav, q = mpf(ks), mpf(nu), mpf(grav), mpf(q)

    def k(t):
        r, v = A(t) / P(t), q / A(t)
        f = factor(ks / (4 * r), 4 * r * v / nu)
        return q / sqrt(f * v * v / (8 * grav * r))
    return k


cases = []
for _ in range(60):
    g, n = geometry(), spread(-3, 0)
    A, P = along(g)
    k, dk = entry(lambda t: A(t) * two_thirds(A(t) / P(t)) / mpf(n))
    cases.append({"law": "manning", "geometry": g, "n": n, "k": k, "rate": dk})
    g, c = geometry(), spread(0, 2.3)
    A, P = along(g)
    k, dk = entry(lambda t: A(t) * sqrt(A(t) / P(t)) * mpf(c))
    cases.append({"law": "chezy", "geometry": g, "c": c, "k": k, "rate": dk})

for i in range(200):
    g = geometry()
    ratio = random.choice([spread(-8, 0), 1 - spread(-4, -0.5)])
    radius = g["area"] / g["perimeter"]
    ks = float(14.8 * radius * ratio)
    if not 1e-12 < ks < 1e4:
        continue
    nu, grav = random.choice([(1.14e-6, 9.80665), (spread(-7, -2), 9.80665), (1.0e-6, 9.81)])
    q = spread(-8, 4)
    k, dk = entry(colebrook_discharge(g, ks, nu, grav, q))
    cases.append({"law": "sand_roughness_discharge", "geometry": g, "ks": ks, "nu": nu, "gravity": grav, "discharge": q, "k": k, "rate": dk})
    s = spread(-8, -0.01)
    w = (8 * grav * radius * s) ** 0.5
    lack = 1 - ks / (14.8 * radius) - 2.51 * nu / (4 * radius * w)
    if abs(lack) < 1e-4:
        continue
    if lack < 0:
        cases.append({"law": "sand_roughness_slope", "geometry": g, "ks": ks, "nu": nu, "gravity": grav, "slope": s, "k": "0", "rate": "0"})
        continue
    k, dk = entry(colebrook_slope(g, ks, nu, grav, s))
    cases.append({"law": "sand_roughness_slope", "geometry": g, "ks": ks, "nu": nu, "gravity": grav, "slope": s, "k": k, "rate": dk})

for _ in range(40):
    relative, reynolds = random.choice([0.0, spread(-9, 0.5)]), spread(-3, 12)
    cases.append({"law": "darcy_factor", "relative_roughness": relative, "reynolds": reynolds, "k": text(factor(mpf(relative), mpf(reynolds))), "rate": "0"})

for i in range(60):
    g, bed, sides = geometry(), spread(-2.5, -1), spread(-2.5, -1)
    width = float(g["perimeter"] * random.uniform(0.01, 0.99))
    A, P = along(g)
    rules = {
        "horton_einstein": lambda t: two_thirds((mpf(width) * power(mpf(bed), 1.5) + (P(t) - mpf(width)) * power(mpf(sides), 1.5)) / P(t)),
        "pavlovskii": lambda t: sqrt((mpf(width) * mpf(bed) ** 2 + (P(t) - mpf(width)) * mpf(sides) ** 2) / P(t)),
    }
    for how, n in rules.items():
        k, dk = entry(lambda t: A(t) * two_thirds(A(t) / P(t)) / n(t))
        cases.append({"law": "bed_and_sides", "combine": how, "geometry": g, "width": width, "bed": bed, "sides": sides, "k": k, "rate": dk})

for i in range(60):
    parts = [geometry(-2, 1) for _ in range(random.randint(1, 5))]
    if i % 3 == 0:  # a zone that is nearly dry on a level bench
        parts[-1]["area"] = parts[-1]["area"] * spread(-14, -4)
    n = [spread(-2.3, -0.7) for _ in parts]
    # The whole is the sum of its zones, rounded to float64; the laws below take those very numbers.
    g = {m: float(sum(p[m] for p in parts)) for m in ("area", "perimeter", "top_width", "perimeter_rate")}
    A, P = along(g)
    zones = [along(p) for p in parts]

    def ks(t):
        return [a(t) * two_thirds(a(t) / p(t)) / mpf(c) for (a, p), c in zip(zones, n)]

    def areas(t):
        return [a(t) for a, _ in zones]

    def total(t):
        return sum(ks(t))

    def alpha(t):
        return sum(k ** 3 / a ** 2 for k, a in zip(ks(t), areas(t))) * A(t) ** 2 / total(t) ** 3

    def beta(t):
        return sum(k ** 2 / a for k, a in zip(ks(t), areas(t))) * A(t) / total(t) ** 2

    k, dk = entry(total)
    a, da = entry(alpha)
    b, db = entry(beta)
    case = {"law": "zones", "geometry": g, "parts": parts, "zone_n": n}
    cases.append(case | {"combine": "divided", "k": k, "rate": dk, "alpha": a, "alpha_rate": da, "beta": b, "beta_rate": db})
    k, dk = entry(lambda t: A(t) * two_thirds(A(t) / P(t)) / two_thirds(sum(p(t) * power(mpf(c), 1.5) for (_, p), c in zip(zones, n)) / P(t)))
    cases.append(case | {"combine": "horton_einstein", "k": k, "rate": dk, "alpha": "1", "alpha_rate": "0", "beta": "1", "beta_rate": "0"})
    k, dk = entry(lambda t: A(t) * two_thirds(A(t) / P(t)) / sqrt(sum(p(t) * mpf(c) ** 2 for (_, p), c in zip(zones, n)) / P(t)))
    cases.append(case | {"combine": "pavlovskii", "k": k, "rate": dk, "alpha": "1", "alpha_rate": "0", "beta": "1", "beta_rate": "0"})

print("[\n" + ",\n".join(json.dumps(c) for c in cases) + "\n]")
