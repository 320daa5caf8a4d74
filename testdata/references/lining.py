#!/usr/bin/env python3
"""Makes lining.json: what linings of grass and of stones do to the flow, and what stones stand on steep slopes, to 30 digits, printed to 25.

The formulas are written here as FHWA's Hydraulic Engineering Circular 15 (third edition, 2005) states them, for Manning's n, and solved as it says, by trial:
the velocity by bisection until n and velocity agree, normal depths by bisection of the discharge, the safety of stones by bisection of the
size that a safety asks. Derivatives are central differences. The program under test uses closed forms: other routes.

    python3 lining.py > lining.json
"""
import json
import random

from mpmath import mp, mpf, log10, sqrt, power, sin, cos, tan, atan, asin

mp.dps, steps = 60, 210
random.seed(20261202)
RHO = mpf(1000)


def text(x):
    return mp.nstr(x, 25, strip_zeros=False)


def spread(low, high):
    return float(10 ** random.uniform(low, high))


def shape():
    bottom = random.choice([0.0, spread(-1, 1), spread(-1, 1)])
    left = random.choice([0.0, random.uniform(0.5, 5)]) if bottom else random.uniform(0.5, 5)
    return {"bottom": bottom, "left": left, "right": random.uniform(0.5, 5)}


def geometry(s, y):
    b, l, r = (mpf(s[m]) for m in ("bottom", "left", "right"))
    return b * y + (l + r) * y * y / 2, b + y * (sqrt(1 + l * l) + sqrt(1 + r * r)), b + (l + r) * y


def bisect(f, low, high, steps):
    """The zero of f, which is negative at low and positive at high."""
    for _ in range(steps):
        middle = sqrt(low * high)
        if f(middle) > 0:
            high = middle
        else:
            low = middle
    return sqrt(low * high)


def n_grass(cn, gravity, a, p, t, slope, velocity):
    return cn / power(RHO * gravity * (a / p) * slope, mpf("0.4"))


def n_stones(stone, gravity, a, p, t, slope, velocity):
    mean = a / t
    if mean > mpf("1.5") * stone:
        return mpf("0.319") * power(mean, mpf(1) / 6) / (mpf("2.25") + mpf("5.23") * log10(mean / stone))
    froude = velocity / sqrt(gravity * mean)
    b = mpf("1.14") * power(stone / t, mpf("0.453")) * power(mean / stone, mpf("0.814"))
    f_froude = power(mpf("0.28") * froude / b, log10(mpf("0.755") / b))
    f_element = mpf("13.434") * power(t / stone, mpf("0.492")) * power(b, mpf("1.025") * power(t / stone, mpf("0.118")))
    f_channel = power(t / mean, -b)
    return power(mean, mpf(1) / 6) / (sqrt(gravity) * f_froude * f_element * f_channel)


def k_slope(n, y, s, slope):
    """A R^(2/3)/n where n and the velocity R^(2/3) S^(1/2)/n agree."""
    a, p, t = geometry(s, y)
    manning = power(a / p, mpf(2) / 3) * sqrt(slope)
    v = bisect(lambda v: v - manning / n(a, p, t, slope, v), mpf(10) ** -12, mpf(10) ** 9, steps)
    return a * v / sqrt(slope)


def k_discharge(n, y, s, q):
    """The same for a discharge: the slope at which it is Manning's velocity."""
    a, p, t = geometry(s, y)
    v = q / a
    slope = bisect(lambda i: power(a / p, mpf(2) / 3) * sqrt(i) / n(a, p, t, i, v) - v, mpf(10) ** -40, mpf(10) ** 20, steps)
    return q / sqrt(slope)


def entry(f, y):
    h = mpf(10) ** -20 * y
    return text(f(y)), text((f(y + h) - f(y - h)) / (2 * h))


cases = []
for _ in range(40):
    s, y, cn, gravity = shape(), spread(-1.5, 0.7), spread(-1.3, -0.2), random.choice([9.80665, 9.81, 32.2])
    slope, q = spread(-4, -0.5), spread(-2, 1.5)

    def n(*args):
        return n_grass(mpf(cn), mpf(gravity), *args)
    k, dk = entry(lambda y: k_slope(n, y, s, mpf(slope)), mpf(y))
    c, dc = entry(lambda y: k_discharge(n, y, s, mpf(q)), mpf(y))
    cases.append({"what": "grass"} | s | {"depth": y, "roughness": cn, "gravity": gravity, "slope": slope, "discharge": q,
                                          "k_slope": k, "rate_slope": dk, "k_discharge": c, "rate_discharge": dc})

made = 0
while made < 80:
    s, y, stone, gravity = shape(), spread(-1.5, 0.7), spread(-2.5, 0), random.choice([9.80665, 9.81])
    slope, q = spread(-3, -0.6), spread(-2, 1.5)
    a, p, t = (float(x) for x in geometry(s, mpf(y)))
    mean = a / t / stone
    b = 1.14 * (stone / t) ** 0.453 * mean ** 0.814
    if not 0.31 < mean < 185 or abs(mean - 1.5) < 0.01 or (mean < 1.5 and b < 0.13) or (mean > 1.5 and made % 2):
        continue

    def n(*args):
        return n_stones(mpf(stone), mpf(gravity), *args)
    k, dk = entry(lambda y: k_slope(n, y, s, mpf(slope)), mpf(y))
    c, dc = entry(lambda y: k_discharge(n, y, s, mpf(q)), mpf(y))
    cases.append({"what": "stones"} | s | {"depth": y, "roughness": stone, "gravity": gravity, "slope": slope, "discharge": q,
                                           "k_slope": k, "rate_slope": dk, "k_discharge": c, "rate_discharge": dc})
    made += 1

# Normal depths: of stones one below the change of formula and one above it, where both exist; some discharges lie between what flows at both sides of it.
mp.dps, steps = 32, 112
for what, law in (("grass", n_grass), ("stones", n_stones)):
    made = 0
    while made < 14:
        s, slope = shape(), mpf(spread(-2.5, -1))
        roughness = spread(-1.2, -0.3) if what == "grass" else spread(-1.5, -0.3)

        def n(*args):
            return law(mpf(roughness), mpf("9.80665"), *args)

        def uniform(y):
            return k_slope(n, y, s, slope) * sqrt(slope)

        def submerged(times):
            return bisect(lambda y: geometry(s, y)[0] / geometry(s, y)[2] - mpf(times) * mpf(roughness), mpf(10) ** -5, mpf(10) ** 4, steps)
        if what == "grass":
            q = spread(-1, 1)
            depths = [bisect(lambda y: uniform(y) - mpf(q), mpf(10) ** -4, mpf(10) ** 3, steps)]
        else:
            least, change = submerged("0.31"), submerged("1.5")
            if 1.14 * (roughness / float(geometry(s, least)[2])) ** 0.453 * 0.31 ** 0.814 < 0.13:
                continue
            below, above = change * (1 - mpf(10) ** -20), change * (1 + mpf(10) ** -20)
            low, high = uniform(below), uniform(above)
            q = float(sqrt(low * high)) if made % 2 else float(low * mpf(spread(-1, 1)))
            depths = []
            if uniform(least) < q < low:
                depths.append(bisect(lambda y: uniform(y) - mpf(q), least, below, steps))
            elif q <= low:
                continue
            if high < q:
                depths.append(bisect(lambda y: uniform(y) - mpf(q), above, change * 1000, steps))
        cases.append({"what": what + "_normal"} | s | {"roughness": roughness, "gravity": 9.80665, "slope": float(slope), "discharge": q,
                                                        "depths": [text(y) for y in depths]})
        made += 1

# Stones on the sides of a steep channel: the safety factor for which the formula asks exactly this size.
made = 0
while made < 30:
    side, repose, slope = random.uniform(1.5, 6), random.uniform(35, 43), spread(-1, -0.3)
    stone, depth, heavy = spread(-1, 0), spread(-1, 0), random.uniform(2.3, 3)
    gravity = mpf("9.80665")
    theta, phi, alpha = atan(1 / mpf(side)), mpf(repose) * mp.pi / 180, asin(mpf(slope))
    if theta > phi * mpf("0.98"):
        continue
    reynolds = sqrt(gravity * mpf(depth) * mpf(slope)) * mpf(stone) / mpf("1.14e-6")
    shields = mpf("0.047") if reynolds <= 40000 else mpf("0.15") if reynolds >= 200000 else \
        mpf("0.047") + (reynolds - 40000) / (200000 - 40000) * (mpf("0.15") - mpf("0.047"))
    k1 = mpf("0.77") if side <= 1.5 else mpf(1) if side >= 5 else mpf("0.066") * mpf(side) + mpf("0.67")
    eta = k1 * RHO * gravity * mpf(depth) * mpf(slope) / (shields * RHO * gravity * (mpf(heavy) - 1) * mpf(stone))
    beta = atan(cos(alpha) / (2 * sin(theta) / (eta * tan(phi)) + sin(alpha)))

    def wanted(safety):
        rest = cos(theta) * tan(phi) - safety * sin(theta) * cos(beta)
        if rest <= 0:
            return mpf(1)  # no size is large enough
        delta = k1 * (1 + sin(alpha + beta)) * tan(phi) / (2 * rest)
        return safety * mpf(depth) * mpf(slope) * delta / (shields * (mpf(heavy) - 1)) - mpf(stone)
    cases.append({"what": "steep", "side_slope": side, "angle_of_repose": repose, "slope": slope, "roughness": stone, "depth": depth,
                  "specific_gravity": heavy, "gravity": 9.80665, "safety": text(bisect(wanted, mpf(10) ** -6, mpf(10) ** 6, steps))})
    made += 1

print("[\n" + ",\n".join(json.dumps(c) for c in cases) + "\n]")
