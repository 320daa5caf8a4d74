"""Sections, laws and sweeps of gradually varied flow in plain float64 with SciPy, for the references that profiles.py makes.

Written from the interface's documentation, not after the program under test. Depths are normal to the bed, chainages and slopes along it.
A prismatic curve is the integral of ddepth -> dchainage by Gauss's rule of 20 points on panels that are halved until they do not move; everything
else is integrated by DOP853 (Hairer, Norsett, Wanner 1993) with a relative tolerance of 1e-13.
"""
import math

import numpy as np
from scipy.integrate import solve_ivp
from scipy.optimize import brentq

GRAVITY = 9.80665
NODES, WEIGHTS = np.polynomial.legendre.leggauss(20)
NODES, WEIGHTS = NODES.tolist(), WEIGHTS.tolist()


class Reject(Exception):
    """What was drawn is not the case wanted; another is drawn."""


def need(condition, why=""):
    if not condition:
        raise Reject(why)


def root(f, a, b):
    fa, fb = f(a), f(b)
    if fa == 0:
        return a
    if fb == 0:
        return b
    need(fa * fb < 0, "no change of sign")
    return brentq(f, a, b, xtol=1e-300, rtol=9e-16, maxiter=500)


# ------------------------------------------------------------------------------------------------ sections
# at(y) gives area, perimeter, top width and first moment about the surface.

class Trapezoid:
    def __init__(self, width, left, right):
        self.b, self.z, self.w = width, left + right, math.hypot(1, left) + math.hypot(1, right)
        self.closed, self.height, self.breaks = False, math.inf, []

    def at(self, y):
        return (self.b + self.z * y / 2) * y, self.b + self.w * y, self.b + self.z * y, (self.b / 2 + self.z * y / 6) * y * y


class Parabola:
    def __init__(self, width, height):
        self.c = width / math.sqrt(height)
        self.closed, self.height, self.breaks = False, math.inf, []

    def at(self, y):
        t = self.c * math.sqrt(y)
        s = 4 * y / t
        return 2 / 3 * t * y, t / 2 * (math.hypot(1, s) + math.asinh(s) / s), t, 4 / 15 * t * y * y


class Arcs:
    """Arcs from below: (from, to, centre's offset of the right-hand arc, centre's height, radius), symmetrical; a radius of 0 is a wall."""

    def __init__(self, arcs, closed):
        self.arcs, self.closed = arcs, closed
        self.height = arcs[-1][1]
        self.breaks = [a[0] for a in arcs[1:]]

    def primitive(self, arc, y):
        """Integrals of half-width, half-width times height, and half the perimeter."""
        _, _, cx, cy, r = arc
        if r == 0:
            return cx * y, cx * y * y / 2, y, cx
        t = r if y == self.height else y - cy
        root_ = math.sqrt(max(0.0, (r - t) * (r + t)))
        angle = math.atan2(t, root_)
        disc = (t * root_ + r * r * angle) / 2
        return cx * t + disc, cx * y * y / 2 + cy * disc - root_ ** 3 / 3, r * angle, cx + root_

    def at(self, y):
        area = static = perimeter = half = 0.0
        for arc in self.arcs:
            if y <= arc[0]:
                break
            lo, hi = self.primitive(arc, arc[0]), self.primitive(arc, min(y, arc[1]))
            area += 2 * (hi[0] - lo[0])
            static += 2 * (hi[1] - lo[1])
            perimeter += 2 * (hi[2] - lo[2])
            half = hi[3]
        return area, perimeter, 2 * half, y * area - static

    def full(self):
        a, p, _, m = self.at(self.height)
        return a, p, 0.0, m


class Box:
    def __init__(self, width, height):
        self.w, self.height, self.closed, self.breaks = width, height, True, []

    def at(self, y):
        return self.w * y, self.w + 2 * y, self.w, self.w * y * y / 2

    def full(self):
        return self.w * self.height, 2 * (self.w + self.height), 0.0, self.w * self.height ** 2 / 2


class Line:
    """A surveyed line, between its lowest point and the lower of its ends."""

    def __init__(self, points):
        low = min(z for _, z in points)
        self.sides = []
        for (xa, za), (xb, zb) in zip(points, points[1:]):
            self.sides.append((min(za, zb) - low, max(za, zb) - low, xb - xa))
        self.closed, self.height = False, math.inf
        self.breaks = sorted({s[0] for s in self.sides} | {s[1] for s in self.sides} - {0.0})
        self.breaks = [b for b in self.breaks if b > 0]

    def at(self, y):
        a = p = t = m = 0.0
        for lo, hi, dx in self.sides:
            if y <= lo:
                continue
            if hi == lo:
                a, p, t, m = a + dx * (y - lo), p + dx, t + dx, m + dx * (y - lo) ** 2 / 2
                continue
            share = min(1.0, (y - lo) / (hi - lo))
            w, h = dx * share, (hi - lo) * share
            over = y - lo - h
            a += w * h / 2 + w * over
            m += w * h * (h / 6 + over / 2) + w * over * over / 2
            p += math.hypot(w, h)
            t += w
        return a, p, t, m


def build(kind, s):
    if kind == "rectangular":
        return Trapezoid(s["bottom_width"], 0, 0)
    if kind == "trapezoidal":
        return Trapezoid(s["bottom_width"], s["left_side_slope"], s["right_side_slope"])
    if kind == "triangular":
        return Trapezoid(0.0, s["left_side_slope"], s["right_side_slope"])
    if kind == "parabolic":
        return Parabola(s["top_width"], s["height"])
    if kind == "circular":
        r = s["diameter"] / 2
        return Arcs([(0.0, r, 0.0, r, r), (r, 2 * r, 0.0, r, r)], True)
    if kind == "u_shaped":
        r = s["width"] / 2
        u = Arcs([(0.0, r, 0.0, r, r), (r, math.inf, r, 0.0, 0.0)], False)
        return u
    if kind == "egg":
        r = s["height"] / 3
        return Arcs([(0.0, 0.2 * r, 0.0, r / 2, r / 2), (0.2 * r, 2 * r, -2 * r, 2 * r, 3 * r), (2 * r, 3 * r, 0.0, 2 * r, r)], True)
    if kind == "horseshoe":
        # Invert arc of radius 2r from the crown's centre line, side arcs of 2r centred at mid-height on the opposite sides: they meet where both hold.
        r = s["height"] / 2
        meet = brentq(lambda y: math.sqrt(4 * r * r - (y - 2 * r) ** 2) - (-r + math.sqrt(4 * r * r - (y - r) ** 2)), 1e-6 * r, r)
        return Arcs([(0.0, meet, 0.0, 2 * r, 2 * r), (meet, r, -r, r, 2 * r), (r, 2 * r, 0.0, r, r)], True)
    if kind == "box":
        return Box(s["width"], s["height"])
    if kind == "surveyed":
        return Line(s["points"])
    raise ValueError(kind)


# ------------------------------------------------------------------------------------------------ one channel

class Zoned:
    """A two-stage section of which each stage is a zone with a Manning's n of its own: a trapezoid below its benches, and what stands above each bench.

    Gives area, perimeter, top width, first moment, conveyance, alpha, beta and dalpha/ddepth."""

    def __init__(self, section, law):
        self.b, self.z, self.h = section["bottom_width"], section["side_slope"], section["bench_height"]
        self.left, self.right, self.zu = section["left_bench_width"], section["right_bench_width"], section["upper_side_slope"]
        self.n = law["zones"]
        self.closed, self.height, self.breaks = False, math.inf, [self.h]

    def zones(self, y):
        """(area, dA, perimeter, dP, first moment) of the main channel and of the two plains."""
        slant = math.hypot(1, self.z)
        if y <= self.h:
            return [((self.b + self.z * y) * y, self.b + 2 * self.z * y, self.b + 2 * slant * y, 2 * slant, (self.b / 2 + self.z * y / 3) * y * y, self.n[1])]
        top, over = self.b + 2 * self.z * self.h, y - self.h
        main = (self.b + self.z * self.h) * self.h
        moment = (self.b / 2 + self.z * self.h / 3) * self.h ** 2
        out = [(main + top * over, top, self.b + 2 * slant * self.h, 0.0, moment + main * over + top * over * over / 2, self.n[1])]
        for width, n in ((self.left, self.n[0]), (self.right, self.n[2])):
            u = math.hypot(1, self.zu)
            out.append(((width + self.zu * over / 2) * over, width + self.zu * over, width + u * over, u, (width / 2 + self.zu * over / 6) * over * over, n))
        return out

    def at(self, y):
        z = self.zones(y)
        return sum(v[0] for v in z), sum(v[2] for v in z), sum(v[1] for v in z), sum(v[4] for v in z)

    def motion(self, y):
        a = da = k = dk = s3 = ds3 = s2 = 0.0
        for area, darea, p, dp, _, n in self.zones(y):
            ki = area * (area / p) ** (2 / 3) / n
            dki = ki * (5 / 3 * darea / area - 2 / 3 * dp / p)
            a, da, k, dk = a + area, da + darea, k + ki, dk + dki
            s3 += ki ** 3 / area ** 2
            ds3 += ki ** 3 / area ** 2 * (3 * dki / ki - 2 * darea / area)
            s2 += ki ** 2 / area
        alpha = s3 * a * a / k ** 3
        return k, alpha, s2 * a / k ** 2, alpha * (ds3 / s3 + 2 * da / a - 3 * dk / k)


class Channel:
    """What one barrel of a channel does; discharges handed in are totals."""

    def __init__(self, kind, section, law, slope, barrels=1, alpha=1.0, beta=1.0):
        self.kind, self.section, self.law, self.slope, self.barrels, self.alpha, self.beta = kind, section, law, slope, barrels, alpha, beta
        self.sec = Zoned(section, law) if "zones" in law else build(kind, section)
        if "manning_by_depth" in law:
            self.sec.breaks = sorted(set(self.sec.breaks) | {row[0] for row in law["manning_by_depth"]})
        self.cos = math.sqrt((1 - slope) * (1 + slope))
        self.known = {}

    def is_full(self, y):
        return self.sec.closed and y >= self.sec.height

    def geometry(self, y):
        if self.is_full(y):
            a, p, t, m = self.sec.full()
            return a, p, t, m + a * (y - self.sec.height)
        return self.sec.at(y)

    def conveyance(self, a, p, q, y=None):
        r = a / p
        if "zones" in self.law:
            return self.sec.motion(y)[0]
        if "manning_by_depth" in self.law:
            rows = self.law["manning_by_depth"]
            n = rows[0][1] if y <= rows[0][0] else rows[-1][1]
            for (ya, na), (yb, nb) in zip(rows, rows[1:]):
                if ya < y <= yb:
                    n = na + (nb - na) * (y - ya) / (yb - ya)
            return a * r ** (2 / 3) / n
        if "bed" in self.law:  # Horton and Einstein
            b, s = self.law["bed"], self.law["sides"]
            n = ((self.sec.b * b ** 1.5 + (p - self.sec.b) * s ** 1.5) / p) ** (2 / 3)
            return a * r ** (2 / 3) / n
        if "manning" in self.law:
            return a * r ** (2 / 3) / self.law["manning"]
        if "strickler" in self.law:
            return self.law["strickler"] * a * r ** (2 / 3)
        if "chezy" in self.law:
            return self.law["chezy"] * a * math.sqrt(r)
        ks, nu = self.law["sand_roughness"], self.law["kinematic_viscosity"]
        d, re = 4 * r, q / a * 4 * r / nu
        if ks > d:
            return 1e-100 * q  # no law so shallow; no case comes here
        s = max(1e-3, -2 * math.log10(ks / (3.7 * d) + 1e-4))  # s = 1/sqrt(f)
        for _ in range(100):
            z = ks / (3.7 * d) + 2.51 * s / re
            step = (s + 2 * math.log10(z)) / (1 + 2 / math.log(10) * 2.51 / re / z)
            s = s - step if s > step else s / 10
            if abs(step) < 1e-15 * s:
                break
        return q / math.sqrt((q / a) ** 2 / (8 * GRAVITY * r * s * s))

    def friction(self, y, total):
        q = total / self.barrels
        a, p, _, _ = self.geometry(y)
        return (q / self.conveyance(a, p, q, y)) ** 2

    def N(self, y, total):
        return self.slope - self.friction(y, total)

    def D(self, y, total):
        """dE/ddepth = cos*(1 - F^2)."""
        q = total / self.barrels
        a, _, t, _ = self.geometry(y)
        alpha, rate = self.alpha, 0.0
        if "zones" in self.law:
            _, alpha, _, rate = self.sec.motion(y)
        return self.cos - q * q / (GRAVITY * a * a) * (alpha * t / a - rate / 2)

    def head(self, y, total):
        q = total / self.barrels
        alpha = self.sec.motion(y)[1] if "zones" in self.law else self.alpha
        return alpha * q * q / (2 * GRAVITY * self.geometry(y)[0] ** 2)

    def E(self, y, total):
        return y * self.cos + self.head(y, total)

    def M(self, y, total):
        q = total / self.barrels
        a, _, _, m = self.geometry(y)
        beta = self.sec.motion(y)[2] if "zones" in self.law else self.beta
        return beta * q * q / (GRAVITY * a) + self.cos * m

    def top(self):
        return self.sec.height * (1 - 1e-13) if self.sec.closed else 1e4

    def critical(self, total):
        roots = self.remembered("critical", total, lambda y: self.D(y, total))
        need(len(roots) == 1, f"{len(roots)} critical depths")
        return roots[0]

    def normals(self, total):
        return [] if self.slope <= 0 else self.remembered("normal", total, lambda y: self.N(y, total))

    def remembered(self, what, total, f):
        if (what, total) not in self.known:
            self.known[what, total] = self.roots(f)
        return self.known[what, total]

    def normal(self, total):
        roots = self.normals(total)
        need(roots, "no normal depth")
        return roots[0]

    def roots(self, f):
        marks = [math.exp(v) for v in np.linspace(math.log(1e-5), math.log(self.top()), 400)]
        if self.sec.closed:
            marks = sorted(marks + [self.sec.height * (1 - 10 ** -k) for k in np.linspace(0.5, 12.9, 200).tolist()])
        marks = sorted(set(marks) | {b for b in self.sec.breaks if b < self.top()})
        values, found = [f(y) for y in marks], []
        for a, b, fa, fb in zip(marks, marks[1:], values, values[1:]):
            if fa == 0:
                found.append(a)
            elif fa * fb < 0:
                found.append(root(f, a, b))
        return found

    def subcritical(self, f, total):
        """The deepest depth above critical where f changes its sign from below to above 0."""
        return root(f, self.critical(total), self.sec.height * 50 if self.sec.closed else 1e4)

    def supercritical(self, f, total):
        return root(f, 1e-5, self.critical(total))

    def slope_class(self, total):
        if self.slope < 0:
            return "A"
        if self.slope == 0:
            return "H"
        normals = self.normals(total)
        if not normals:
            return "M"
        yc = self.critical(total)
        if abs(normals[0] - yc) <= 1e-6 * yc:
            return "C"
        return "M" if normals[0] > yc else "S"

    def curve(self, y, total):
        """The name of the curve; None where it stands on the edge of one."""
        if self.is_full(y):
            return ""
        for n in self.normals(total):
            off = abs(y - n) / n
            if abs(off - 1e-6) < 1e-8:
                return None
            if off <= 1e-6:
                return "uniform"
        froude = math.sqrt(1 - self.D(y, total) / self.cos)
        if abs(abs(froude - 1) - 1e-6) < 1e-8:
            return None
        n, number = self.N(y, total), 2
        if abs(froude - 1) <= 1e-6:
            number = 2
        elif n > 0 and froude < 1:
            number = 1
        elif n < 0 and froude > 1:
            number = 3
        return self.slope_class(total) + str(number)


# ------------------------------------------------------------------------------------------------ prismatic sweeps

class Sweep:
    """A prismatic curve from a depth y0 at chainage x0 in direction s (-1 upstream, 1 downstream), up to the chainage `limit`.

    `end` is the chainage where it ends: the limit, or where it reaches critical depth."""

    def __init__(self, channel, total, x0, y0, s, limit):
        self.ch, self.q, self.x0, self.y0, self.s, self.limit = channel, total, x0, y0, s, limit
        self.panels = []  # (x0, x1, u0, u1, chart)
        self.end, self.end_depth = limit, None
        self.settled = None  # (chainage, depth) from which on the depth is the normal depth
        self.build()

    def build(self):
        ch, q, s = self.ch, self.q, self.s
        x, y = self.x0, self.y0
        sub = s < 0
        for _ in range(6):
            if s * (self.limit - x) <= 0:
                return
            if ch.is_full(y):
                rate = ch.N(y, q) / ch.cos
                h = ch.sec.height
                if y > h or s * rate > 0:
                    reach = (h - y) / (s * rate) if s * rate < 0 else math.inf
                    stop = self.limit if reach >= abs(self.limit - x) else x + s * reach
                    self.panels.append((x, stop, y, y + rate * (stop - x), "full"))
                    if stop == self.limit:
                        return
                    x, y = stop, h
                    continue
                x, y = self.free(x, h, -1)
                if y is None:
                    return
                continue
            n = ch.N(y, q)
            if n == 0 or self.at_normal(y):
                self.panels.append((x, self.limit, y, y, "still"))
                return
            d = 1 if sub else -1
            direction = 1 if s * n * d > 0 else -1
            x, y = self.free(x, y, direction)
            if y is None:
                return

    def at_normal(self, y):
        return any(abs(y - n) <= 1e-15 * n for n in self.ch.normals(self.q))

    def free(self, x, y, direction):
        """Follows the free curve; gives where it goes full, else None."""
        ch, q, s = self.ch, self.q, self.s
        h = ch.sec.height
        stops = [(n, "normal") for n in ch.normals(q)]
        try:
            stops.append((ch.critical(q), "critical"))
        except Reject:
            pass
        if ch.sec.closed:
            stops.append((h, "crown"))
        ahead = [st for st in stops if (st[0] - y) * direction > 1e-15 * y]
        target, what = min(ahead, key=lambda st: abs(st[0] - y)) if ahead else (math.inf if direction > 0 else 0.0, "open")
        behind = [st for st in stops if st[1] == "normal" and (y - st[0]) * direction > 0]
        near_crown = ch.sec.closed and not isinstance(ch.sec, Box)

        log_up = lambda pole, side: (lambda v: math.log(side * (v - pole)), lambda u: pole + side * math.exp(u), lambda u, v: v - pole)
        crown = (lambda v: math.sqrt(max(0.0, h - v)), lambda u: h - u * u, lambda u, v: -2 * u)
        plain = (lambda v: v, lambda u: u, lambda u, v: 1.0)

        def integrate(y0, y1, chart):
            nonlocal x
            u0, u1 = chart[0](y0), chart[0](y1)
            # no panel is wider than half a unit of a logarithm, so that each has the noise of its own distance from the pole only
            n = max(1, math.ceil(abs(u1 - u0) / 0.5)) if chart is not plain and chart is not crown else 1
            stack = [(u0 + (u1 - u0) * k / n, u0 + (u1 - u0) * (k + 1) / n if k + 1 < n else u1) for k in reversed(range(n))]
            while stack:
                a, b = stack.pop()
                m = a + (b - a) / 2
                whole = self.gauss(a, b, chart)
                halves = self.gauss(a, m, chart) + self.gauss(m, b, chart)
                # what rounding leaves of S0 - Sf and of 1 - F^2 near the depths where they vanish
                yb = chart[1](b)
                noise = 4e-16 * abs(halves) * max([1.0] + [p / max(abs(p - z), 1e-15 * p) for p, _ in stops if p < 1e300 for z in (chart[1](a), yb)])
                if abs(whole - halves) > 1e-14 * abs(halves) + noise and abs(b - a) > 1e-9 * (abs(a) + abs(b) + 1e-3):
                    stack.append((m, b))
                    stack.append((a, m))
                    continue
                step = halves
                if s * step < 0:
                    raise AssertionError("a curve runs backwards")
                self.panels.append((x, x + step, a, b, chart))
                x += step
                if s * (x - self.limit) >= 0:
                    return True
            return False

        cuts = sorted([b for b in ch.sec.breaks if min(y, target) < b < max(y, target)], reverse=direction < 0)
        start = y
        if near_crown and y == h:  # off the crown first
            mid = h - 0.3 * (h - max(target, 0.3 * h))
            cut = [c for c in cuts if c > mid]
            for c in cut + [mid]:
                if integrate(start, c, crown):
                    return x, None
                start = c
            cuts = [c for c in cuts if c < mid]
        if what == "normal":
            side = 1 if start > target else -1
            chart = log_up(target, side)
            last = target + side * 2e-15 * target
            for c in cuts + [last]:
                if integrate(start, c, chart):
                    return x, None
                start = c
            self.settled = (x, target)
            self.panels.append((x, self.limit, target, target, "still"))
            return x, None
        if what == "open":
            chart = log_up(0.0, 1)
            if behind:
                pole = max(behind, key=lambda st: st[0] * direction)[0]
                chart = log_up(pole, direction)
            far = start
            for c in cuts + [start * 10.0 ** (k * direction) for k in range(1, 9)]:
                if (c - far) * direction <= 0:
                    continue
                if integrate(far, c, chart):
                    return x, None
                far = c
            raise AssertionError("an endless curve")
        # critical depth or the crown, with a pole behind where there is one
        chart = plain
        if behind:
            pole = max(behind, key=lambda st: st[0] * direction)[0]
            if abs(start - pole) < 0.05 * pole:
                chart = log_up(pole, direction)
        finish = target
        if what == "crown" and near_crown:
            finish = h - 0.3 * (h - start)
        for c in [c for c in cuts if (finish - c) * direction > 0] + [finish]:
            if integrate(start, c, chart):
                return x, None
            start = c
        if what == "crown" and near_crown:
            for c in [c for c in cuts if (c - start) * direction > 0] + [h]:
                if integrate(start, c, crown):
                    return x, None
                start = c
        if what == "critical":
            self.end, self.end_depth = x, target
            return x, None
        return x, h

    def gauss(self, a, b, chart):
        _, depth, rate = chart
        half, mid, total = (b - a) / 2, a + (b - a) / 2, 0.0
        for t, w in zip(NODES, WEIGHTS):
            u = mid + half * t
            y = depth(u)
            n = self.ch.N(y, self.q)
            total += w * self.ch.D(y, self.q) / n * rate(u, y)
        return total * half

    def covers(self, x):
        return self.s * (self.end - x) >= 0 and self.s * (x - self.x0) >= 0

    def __call__(self, x):
        if x == self.x0:
            return self.y0
        assert self.covers(x), "outside the sweep"
        for x0, x1, u0, u1, chart in self.panels:
            if self.s * (x1 - x) >= 0:
                if isinstance(chart, str):
                    return u0 + (u1 - u0) * ((x - x0) / (x1 - x0))
                if x == x1:
                    return chart[1](u1)
                f = lambda u: self.gauss(u0, u, chart) - (x - x0) if u != u0 else -(x - x0)
                if f(u1) * f(u0) >= 0:
                    return chart[1](u1)
                return chart[1](brentq(f, u0, u1, xtol=1e-300, rtol=9e-16))
        if self.end_depth is not None and abs(x - self.end) <= 1e-12 * abs(self.end):
            return self.end_depth
        raise AssertionError("no panel")


# ------------------------------------------------------------------------------------------------ ordinary differential equations

def march(rate, x0, y0, points, rtol=1e-13, method="DOP853", longest=math.inf):
    """Depths at the points, which lie in one direction of x0, each integrated to anew."""
    depths, x, y = [], x0, y0
    for p in points:
        if p != x:
            r = solve_ivp(lambda t, v: [rate(t, v[0])], (x, p), [y], method=method, rtol=rtol, atol=1e-14 if rtol < 1e-12 else 1e-12, max_step=longest)
            assert r.success, r.message
            x, y = p, r.y[0][-1]
        depths.append(y)
    return depths
