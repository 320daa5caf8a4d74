#!/usr/bin/python3
"""Writes ostermere_references.json beside it: lowest normal and critical depth of every lawful row of ostermere.ndjson,
computed a second time with 40 digits.

Usage: python3 ostermere_references.py           (needs mpmath; takes about half an hour)

Nothing here is shared with the program: sections are clipped polygons or stacks of circular arcs, friction is textbook
formulas, and a root is the first change of sign on a fine ladder of depths, closed in by bisection and checked by
its residual. Units are converted by 1 ft = 0.3048 m. Sources: V. T. Chow, Open-Channel Hydraulics (1959), sections 2-3 to 2-7
(geometry, velocity coefficients), 3-3 (critical flow), 5-6 and 6-5 (uniform flow, composite roughness); C. F. Colebrook (1939).
"""

import json
import os

import mpmath
from mpmath import mpf

FOOT = mpf("0.3048")
HERE = os.path.dirname(os.path.abspath(__file__))
mpmath.mp.dps = 40


class Polygon:
    """A line of points (offset, level); over its ends the wall goes straight up, dry on the outside."""

    def __init__(self, points, kinks=()):
        self.points = points
        self.bed = min(y for _, y in points)
        self.levels = sorted({y - self.bed for _, y in points} | set(kinks))
        self.top = None

    def at(self, c, depth):
        water = depth + self.bed
        area = perimeter = width = c.mpf(0)
        for (x1, y1), (x2, y2) in zip(self.points, self.points[1:]):
            a, b, run = water - y1, water - y2, x2 - x1
            if a <= 0 and b <= 0:
                continue
            share = c.mpf(1)
            if a < 0 or b < 0:
                share = max(a, b) / abs(a - b)
            area += share * run * (max(a, 0) + max(b, 0)) / 2
            perimeter += share * c.sqrt(run * run + (a - b) ** 2)
            width += share * run
        return area, perimeter, width

    def cut(self, offsets):
        """The parts between offsets, each a polygon over the same bed."""
        parts, rest = [], list(self.points)
        for offset in offsets:
            i = next(i for i in range(1, len(rest)) if rest[i][0] >= offset)
            (x1, y1), (x2, y2) = rest[i - 1], rest[i]
            at = (offset, y1 + (y2 - y1) * (offset - x1) / (x2 - x1))
            parts.append(rest[:i] + [at])
            rest = [at] + rest[i:]
        parts.append(rest)
        out = []
        for points in parts:
            part = Polygon(points)
            part.bed = self.bed
            out.append(part)
        return out


class Arcs:
    """A symmetrical stack of circular arcs: (from, to, level of the centre, its offset, radius); a radius of None is an upright wall at that offset."""

    def __init__(self, arcs, top=None):
        self.arcs, self.top = arcs, top
        self.levels = [hi for _, hi, *_ in arcs if hi is not None]

    def at(self, c, depth):
        area = perimeter = width = c.mpf(0)
        for lo, hi, centre, offset, radius in self.arcs:
            if depth <= lo:
                break
            y = depth if hi is None else min(depth, hi)
            if radius is None:
                area += 2 * offset * (y - lo)
                perimeter += 2 * (y - lo)
                width = 2 * offset
                continue
            u, v = (c.mpf(lo) - centre) / radius, (c.mpf(y) - centre) / radius
            half = lambda t: (t * c.sqrt(1 - t * t) + c.asin(t)) / 2
            u, v = max(u, c.mpf(-1)), min(v, c.mpf(1))  # a centre that was rounded
            area += 2 * (offset * (y - lo) + radius * radius * (half(v) - half(u)))
            perimeter += 2 * radius * (c.asin(v) - c.asin(u))
            width = 2 * (offset + radius * c.sqrt(1 - v * v))
        return area, perimeter, width


class Formula:
    def __init__(self, at, levels=(), top=None):
        self._at, self.levels, self.top = at, list(levels), top

    def at(self, c, depth):
        return self._at(c, depth)


def section(s, size):
    """The section with sizes in metres, and the depth of its bank."""
    kind, bank = s["kind"], size(s["bank_height"]) if "bank_height" in s else None
    far = mpf(10) ** 6
    get = lambda name: size(s[name])
    slope = lambda name: mpf(repr(s[name]))
    if kind in ("rectangular", "trapezoidal", "triangular"):
        b = get("bottom_width") if kind != "triangular" else mpf(0)
        left = right = slope("side_slope") if "side_slope" in s else mpf(0)
        if "left_side_slope" in s:
            left, right = slope("left_side_slope"), slope("right_side_slope")
        return Polygon([(-left * far, far), (mpf(0), mpf(0)), (b, mpf(0)), (b + right * far, far)]), bank
    if kind == "two_stage":
        b, z, h, upper = get("bottom_width") / 2, slope("side_slope"), get("bench_height"), slope("upper_side_slope")
        left = get("left_bench_width" if "left_bench_width" in s else "bench_width")
        right = get("right_bench_width" if "right_bench_width" in s else "bench_width")
        edge = b + z * h
        return Polygon([(-edge - left - upper * far, h + far), (-edge - left, h), (-edge, h), (-b, mpf(0)),
                        (b, mpf(0)), (edge, h), (edge + right, h), (edge + right + upper * far, h + far)]), bank
    if kind == "gutter":
        points, curb = [(mpf(0), far), (mpf(0), mpf(0))], get("curb_height")
        x = y = mpf(0)
        if "gutter_width" in s:
            x = get("gutter_width")
            y = x * slope("gutter_slope")
            points.append((x, y))
        return Polygon(points + [(x + far / slope("cross_slope"), y + far)]), bank or curb
    if kind == "surveyed":
        points = [(size(x), size(y)) for x, y in s["points"]]
        polygon = Polygon(points)
        return polygon, bank or min(points[0][1], points[-1][1]) - polygon.bed
    if kind == "parabolic":
        t, h = get("top_width"), get("height")

        def parabola(c, y):
            width = t * c.sqrt(y / h)
            # x = (width/2) sqrt(level/depth); with q = 4 y/width, the length is width/2 * (sqrt(1+q^2) + asinh(q)/q)
            q = 4 * y / width
            return 2 * width * y / 3, width / 2 * (c.sqrt(1 + q * q) + c.asinh(q) / q), width

        return Formula(parabola), bank
    if kind == "u_shaped":
        r = get("width") / 2
        return Arcs([(mpf(0), r, r, mpf(0), r), (r, None, None, r, None)]), bank
    if kind == "circular":
        r = get("diameter") / 2
        return Arcs([(mpf(0), 2 * r, r, mpf(0), r)], 2 * r), 2 * r
    if kind == "egg":
        h = get("height")
        r = h / 3
        arcs = [(mpf(0), r / 5, r / 2, mpf(0), r / 2), (r / 5, 2 * r, 2 * r, -2 * r, 3 * r), (2 * r, h, 2 * r, mpf(0), r)]
        if s.get("inverted"):
            arcs = [(h - hi, h - lo, h - centre, offset, radius) for lo, hi, centre, offset, radius in reversed(arcs)]
        return Arcs(arcs, h), h
    if kind == "horseshoe":
        h = get("height")
        r = h / 2
        meet = r * (3 - mpmath.mp.sqrt(7)) / 2  # where invert and side arcs cross: (r - y)^2 + (y - 2r)^2 = 4r^2
        return Arcs([(mpf(0), meet, 2 * r, mpf(0), 2 * r), (meet, r, r, -r, 2 * r), (r, h, r, mpf(0), r)], h), h
    if kind == "elliptical":
        w, h = get("width") / 2, get("height") / 2

        def ellipse(c, y):
            t = min((c.mpf(y) - h) / h, c.mpf(1))
            phi = c.asin(t)
            area = w * h * (t * c.sqrt(1 - t * t) + phi + c.pi / 2)
            # x = w cos p, level = h sin p: the element is sqrt(w^2 sin^2 + h^2 cos^2) = h sqrt(1 - (1 - w^2/h^2) sin^2)
            m = 1 - (w / h) ** 2
            return area, 2 * h * (c.ellipe(phi, m) + c.ellipe(m)), 2 * w * c.sqrt(1 - t * t)

        return Formula(ellipse, [2 * h], 2 * h), 2 * h
    if kind == "box":
        w, h, leg = get("width"), get("height"), get("haunch") if "haunch" in s else mpf(0)

        def box(c, y):
            over = max(y - (h - leg), c.mpf(0))
            return w * y - over * over, w + 2 * (y - over) + 2 * c.sqrt(c.mpf(2)) * over, w - 2 * over

        return Formula(box, [h - leg, h], h), h
    if kind == "tabulated":
        area_size = size(1) ** 2
        rows = [(size(d), mpf(repr(a)) * area_size, size(p), size(t)) for d, a, p, t in s["rows"]]

        def table(c, y):
            d1, a1, p1, t1 = rows[0]
            if y <= d1:
                m = t1 * d1 / a1
                x = y / d1
                return a1 * x**m, p1 * x ** (m - 1), t1 * x ** (m - 1)
            i = next(i for i in range(1, len(rows)) if y <= rows[i][0] or i == len(rows) - 1)
            (da, aa, pa, ta), (db, ab, pb, tb) = rows[i - 1], rows[i]
            span = db - da
            u = (y - da) / span
            area = (aa * (1 + 2 * u) * (1 - u) ** 2 + ab * u * u * (3 - 2 * u) + span * u * (1 - u) * (ta * (1 - u) - tb * u))
            width = (6 * u * (1 - u) * (ab - aa) / span + ta * (1 - u) * (1 - 3 * u) + tb * u * (3 * u - 2))
            return area, pa + (pb - pa) * u, width

        return Formula(table, [r[0] for r in rows], rows[-1][0]), bank or rows[-1][0]
    raise ValueError(kind)


def friction(r, s, shape, size, chezy_factor):
    """A function (context, depth, slope) -> conveyance, alpha, beta; and the depths at which it may jump."""
    number = lambda x: mpf(repr(x))

    def power(k, exponent):
        def law(c, y, slope):
            a, p, _ = shape.at(c, y)
            return k * a * (a / p) ** (c.mpf(exponent[0]) / exponent[1]), c.mpf(1), c.mpf(1)

        return law

    if "manning" in r:
        return power(1 / number(r["manning"]), (2, 3)), []
    if "strickler" in r:
        return power(number(r["strickler"]), (2, 3)), []
    if "chezy" in r:
        return power(number(r["chezy"]) * chezy_factor, (1, 2)), []
    if "sand_roughness" in r:
        ks, nu = size(r["sand_roughness"]), number(r.get("kinematic_viscosity", 1.14e-6))

        def sand(c, y, slope):
            a, p, _ = shape.at(c, y)
            d = 4 * a / p
            root = c.sqrt(2 * c.mpf("9.80665") * d)  # V = root * sqrt(S/f), and Re sqrt(f) = d root sqrt(S)/nu
            argument = ks / (c.mpf("3.7") * d) + c.mpf("2.51") * nu / (d * root * c.sqrt(slope))
            return (a * root * -2 * c.log10(argument) if argument < 1 else c.mpf(0)), c.mpf(1), c.mpf(1)

        return sand, []
    if "manning_by_depth" in r:
        table = [(size(d), number(n)) for d, n in r["manning_by_depth"]]

        def by_depth(c, y, slope):
            n = table[0][1] if y <= table[0][0] else table[-1][1]
            for (d1, n1), (d2, n2) in zip(table, table[1:]):
                if d1 < y <= d2:
                    n = n1 + (n2 - n1) * (y - d1) / (d2 - d1)
            a, p, _ = shape.at(c, y)
            return a * (a / p) ** (c.mpf(2) / 3) / n, c.mpf(1), c.mpf(1)

        return by_depth, [d for d, _ in table]

    def combined(c, a, parts, how):
        """parts: (perimeter, n)"""
        p = sum(q for q, _ in parts)
        if how == "horton_einstein":
            n = (sum(q * n ** c.mpf("1.5") for q, n in parts) / p) ** (c.mpf(2) / 3)
        else:
            n = c.sqrt(sum(q * n * n for q, n in parts) / p)
        return a * (a / p) ** (c.mpf(2) / 3) / n, c.mpf(1), c.mpf(1)

    if "bed" in r:
        bed, sides = number(r["bed"]["manning"]), number(r["sides"]["manning"])
        width = size(s["width"] if s["kind"] == "box" else s["bottom_width"])
        how = r.get("combine", "horton_einstein")

        def bed_and_sides(c, y, slope):
            a, p, _ = shape.at(c, y)
            return combined(c, a, [(width, bed), (p - width, sides)], how)

        return bed_and_sides, []
    zones = r["zones"]
    parts = shape.cut([size(z["until"]) for z in zones[:-1]])
    ns = [number(z["manning"]) for z in zones]
    how = r.get("combine", "divided")

    def zoned(c, y, slope):
        wet = [(part.at(c, y), n) for part, n in zip(parts, ns)]
        area = sum(g[0] for g, _ in wet)
        if how in ("horton_einstein", "pavlovskii"):
            return combined(c, area, [(g[1], n) for g, n in wet], how)
        k = second = third = c.mpf(0)
        for (a, p, _), n in wet:
            if a > 0:
                ki = a * (a / p) ** (c.mpf(2) / 3) / n
                k, second, third = k + ki, second + ki**2 / a, third + ki**3 / a**2
        return k, third * area**2 / k**3, second * area / k**2

    levels = [y - shape.bed for part in parts for _, y in part.points]
    return zoned, levels


def first_root(f, ladder, rising_only, precise):
    """The lowest depth at which f passes through zero (from below to above, if so told), to 40 digits; None where there is none.

    f(context, depth) runs with 18 digits along the ladder; precise(depth) says whether the residual is one of a root.
    """
    low, at_low = None, None
    for y in ladder:
        with mpmath.workdps(18):
            value = f(mpmath.mp, mpf(y))
        if at_low is not None and (at_low < 0 <= value or not rising_only and at_low > 0 >= value):
            a, b, sign = mpf(low), mpf(y), 1 if at_low < 0 else -1
            for _ in range(140):
                m = (a + b) / 2
                if sign * f(mpmath.mp, m) < 0:
                    a = m
                else:
                    b = m
            if precise(b):
                return b
        low, at_low = y, value
    return None


def answer(request):
    us = request.get("units") == "us"
    foot = FOOT if us else mpf(1)
    size = lambda x: mpf(repr(x)) * foot
    s, slope = request["section"], mpf(repr(request["bed_slope"]))
    discharge = mpf(repr(request["discharge"])) * foot**3 / request.get("barrels", 1)
    shape, bank = section(s, size)
    law, jumps = friction(request["roughness"], s, shape, size, mpmath.mp.sqrt(foot))
    gravity = mpf("9.80665")
    cosine = mpmath.mp.sqrt(1 - slope * slope)
    top = shape.top or 40 * (bank or mpf(3))
    breaks = [float(y) for y in list(shape.levels) + list(jumps) if 0 < y < top]
    ladder = {float(top) * (i / 700) for i in range(1, 700)} | {float(top) * 10 ** (-i / 80) for i in range(1, 640)}
    ladder |= {y * (1 + d) for y in breaks for d in (-1e-11, 1e-11)} | {float(top) * (1 - 10 ** (-i / 4)) for i in range(1, 48)}
    ladder = sorted(y for y in ladder if 0 < y < float(top))

    def geometry(c, y):
        return shape.at(c, y)

    def uniform(c, y):
        return law(c, y, slope)[0] * c.sqrt(c.mpf(slope)) / c.mpf(discharge) - 1

    def alpha(c, y):
        if "energy_coefficient" in request:
            return c.mpf(repr(request["energy_coefficient"]))
        return law(c, y, max(slope, mpf("0.001")))[1]

    def energy_rate(c, y):  # dE/dy, over cos
        a, _, t = geometry(c, y)
        head = c.mpf(discharge) ** 2 / (2 * c.mpf(gravity) * a * a)
        step = y * c.mpf(10) ** -(c.dps // 3)
        rate = c.mpf(0)
        if "zones" in request["roughness"] and "energy_coefficient" not in request:
            rate = (alpha(c, y + step) - alpha(c, y - step)) / (2 * step)
        return 1 - (2 * alpha(c, y) * head * t / a - rate * head) / c.mpf(cosine)

    normal = None
    if slope > 0:
        normal = first_root(uniform, ladder, False, lambda y: abs(uniform(mpmath.mp, y)) < mpf(10) ** -20)
    critical = first_root(energy_rate, ladder, True, lambda y: abs(energy_rate(mpmath.mp, y)) < mpf(10) ** -15)
    out = {"line": request["line"]}
    show = lambda x: None if x is None else mpmath.nstr(x / foot, 25)
    out["normal_depth"], out["critical_depth"] = show(normal), show(critical)
    if normal is not None:
        a, _, _ = geometry(mpmath.mp, normal)
        out["normal_velocity"] = show(discharge / a)
    return out


# Rows that are wrong on purpose and get a problem: cmd/internal/demo/mistakes.go.
REFUSED = {17, 43, 74, 101, 133, 160, 192, 221, 248, 301, 334, 362, 428, 457, 489, 518, 551, 583}


def main():
    lawful = []
    with open(os.path.join(HERE, "ostermere.ndjson"), encoding="utf-8") as register:
        for number, line in enumerate(register, 1):
            if number in REFUSED:
                continue
            request = json.loads(line)
            request["line"] = number
            lawful.append(answer(request))
    with open(os.path.join(HERE, "ostermere_references.json"), "w", encoding="utf-8") as out:
        out.write("[\n" + ",\n".join(json.dumps(row) for row in lawful) + "\n]\n")


if __name__ == "__main__":
    main()
