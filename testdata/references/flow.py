#!/usr/bin/env python3
"""Makes flow.jsonl: geometry, states and characteristic depths of all kinds of sections to 40 digits, printed to 25.

Everything is written here as the interface's documentation states it (sections, friction laws, specific energy and force, Froude number), not
after the program under test, and evaluated with mpmath at 70 digits on the very float64 numbers that the tests use:

  - straight-sided sections by clipping each line at the water surface, arcs by antiderivatives from the lowest point, the ellipse by
    Legendre's integral of the second kind through Gauss's transformation, the parabola in closed form, tables by Hermite's cubic;
  - every root by a dense scan of each smooth piece between the depths where something breaks (90 to 170 points a piece, closest at both ends), with a
    golden-section search wherever the derivative comes near zero between samples, and then Chandrupatla's bracketing method (T. R. Chandrupatla 1997,
    Advances in Engineering Software 28) to 1e-48 of the depth.

The seed of each case is its kind and number, so that a kind can be made again alone. --check holds the geometry against numerical quadrature and the
rates against differences.

    /usr/bin/python3 flow.py > flow.jsonl        (two processes, some minutes; "flow.py circular" makes that kind alone, "flow.py other" other cases)
    /usr/bin/python3 flow.py --check
"""
import bisect
import json
import multiprocessing
import random
import sys

from mpmath import mp, mpf

mp.dps = 70
ZERO, ONE, TWO = mpf(0), mpf(1), mpf(2)
PI = +mp.pi
LN10 = mp.log(10)
KINDS = ["rectangular", "trapezoidal", "triangular", "parabolic", "u_shaped", "circular", "box", "elliptical", "egg", "horseshoe",
         "gutter", "two_stage", "surveyed", "tabulated"]
SEED = ""
COUNT = {"two_stage": 240, "surveyed": 200, "tabulated": 130}
STATE = ["area", "wetted_perimeter", "top_width", "moment", "perimeter_rate", "top_width_rate", "hydraulic_radius", "hydraulic_depth",
         "centroid_depth", "conveyance", "uniform_discharge", "velocity", "velocity_head", "froude_number", "specific_energy",
         "specific_force", "friction_slope", "bed_shear_stress", "stream_power"]


class Skip(Exception):
    """The case drawn is one of which nothing certain can be said; another is drawn."""


# ---------------------------------------------------------------- geometry
# A geometry is (area, perimeter, top width, first moment about the surface, dperimeter/ddepth, dwidth/ddepth).
# side 0 takes the value just below a depth, side 1 the limit from above.

class Straight:
    """Sections with straight sides: stretches (from, to, run, length) that widen by run and wet length per unit depth, to None for ever,
    and level ones (level, width)."""

    def __init__(self, stretches, levels, height=None, roof=ZERO):
        self.stretches, self.levels, self.height, self.roof = stretches, levels, height, roof
        self.closed = height is not None
        marks = {z for s in stretches for z in s[:2] if z is not None} | {l[0] for l in levels}
        self.marks = sorted(m for m in marks if height is None or m < height)
        self.breaks = [m for m in self.marks if m > 0]
        self.pieces = {}

    def clip(self, y, side=0):
        """By clipping every stretch at the surface."""
        a = p = t = m = dp = dt = ZERO
        for lo, hi, run, length in self.stretches:
            if y > lo or side and y == lo:
                inside = hi is None or y < hi or not side and y == hi
                top = y if inside else hi
                t += run * (top - lo)
                p += length * (top - lo)
                a += run * ((y - lo) ** 2 - (y - top) ** 2) / 2
                m += run * ((y - lo) ** 3 - (y - top) ** 3) / 6
                if inside:
                    dp += length
                    dt += run
        for level, width in self.levels:
            if y > level or side and y == level:
                t += width
                p += width
                a += width * (y - level)
                m += width * (y - level) ** 2 / 2
        return a, p, t, m, dp, dt

    def at(self, y, side=0):
        """The same, as a polynomial in the height above the last mark below."""
        i = (bisect.bisect_right if side else bisect.bisect_left)(self.marks, y) - 1
        if i < 0:
            return ZERO, ZERO, ZERO, ZERO, ZERO, ZERO
        if i not in self.pieces:
            self.pieces[i] = self.clip(self.marks[i], 1)
        a, p, t, m, dp, dt = self.pieces[i]
        d = y - self.marks[i]
        w = d * dt
        return a + d * (t + w / 2), p + d * dp, t + w, m + d * (a + d * (t / 2 + w / 6)), dp, dt

    def full(self):
        a, p, t, m, dp, dt = self.at(self.height)
        return a, p + self.roof, ZERO, m, dp, dt


def polyline(points, left=None, right=None):
    """Segments of a line from left to right: (xa, za, xb, zb), with rays (None, slope, xb, zb) and (xa, za, None, slope)."""
    segments = []
    if left is not None:
        segments.append((None, left) + points[0])
    segments += [a + b for a, b in zip(points, points[1:])]
    if right is not None:
        segments.append(points[-1] + (None, right))
    return segments


def straight(segments, lo=None, hi=None):
    """The section of the segments between two offsets (None: no limit), whose walls at a limit count if they are wetted from inside."""
    stretches, levels = [], []

    def slope(z0, z1, run):
        if z1 is None or z1 > z0:
            stretches.append((z0, z1, run, mp.sqrt(1 + run * run)))

    for xa, za, xb, zb in segments:
        if xa is None or xb is None:
            if xa is None:  # falls to the right
                x0, z0, run = xb, zb, za
                wall_inside = (lo is None or x0 >= lo) and (hi is None or x0 < hi)
                near, far = (None if hi is None else x0 - hi), (None if lo is None else x0 - lo)
            else:
                x0, z0, run = xa, za, zb
                wall_inside = (lo is None or x0 > lo) and (hi is None or x0 <= hi)
                near, far = (None if lo is None else lo - x0), (None if hi is None else hi - x0)
            if run == 0:
                if wall_inside:
                    slope(z0, None, run)
                continue
            # the ray from distance `near` to distance `far` from its foot
            near = ZERO if near is None or near < 0 else near
            if far is None:
                slope(z0 + near / run, None, run)
            elif far > near:
                slope(z0 + near / run, z0 + far / run, run)
            continue
        if xa == xb:
            if za > zb:
                inside = (lo is None or xa >= lo) and (hi is None or xa < hi)
            else:
                inside = (lo is None or xa > lo) and (hi is None or xa <= hi)
            if inside and za != zb:
                slope(min(za, zb), max(za, zb), ZERO)
            continue
        a = xa if lo is None else max(xa, lo)
        b = xb if hi is None else min(xb, hi)
        if a >= b:
            continue
        if za == zb:
            levels.append((za, b - a))
            continue
        fa, fb = za + (zb - za) * (a - xa) / (xb - xa), za + (zb - za) * (b - xa) / (xb - xa)
        slope(min(fa, fb), max(fa, fb), (xb - xa) / abs(zb - za))
    return Straight(stretches, levels)


class Arcs:
    """Symmetrical sections of circular arcs (from, to, centre, inset, radius): half the width is sqrt(radius^2 - (z - centre)^2) - inset, or of
    vertical walls (from, None, half width)."""

    def __init__(self, arcs, height=None):
        self.height, self.closed = height, height is not None
        self.arcs = []
        area = first = perimeter = ZERO
        for arc in arcs:
            self.arcs.append((arc, area, first, perimeter))
            if arc[1] is not None:
                da, df, dp = self.part(arc, arc[1])
                area, first, perimeter = area + da, first + df, perimeter + dp
        self.breaks = [arc[0] for arc in arcs if arc[0] > 0]

    @staticmethod
    def part(arc, y):
        """Area, its first moment about depth 0 and perimeter of an arc from its beginning to y."""
        if len(arc) == 3:
            lo, _, half = arc
            return 2 * half * (y - lo), half * (y * y - lo * lo), 2 * (y - lo)
        lo, _, centre, inset, r = arc

        def area(v):
            return (v * mp.sqrt(r * r - v * v) + r * r * mp.asin(v / r)) / 2

        def first(v):
            return -(r * r - v * v) * mp.sqrt(r * r - v * v) / 3

        u, v = (max(-r, min(r, z - centre)) for z in (lo, y))  # a third of a height is rounded
        da = area(v) - area(u)
        return (2 * (da - inset * (y - lo)), 2 * (first(v) - first(u) + centre * da - inset * (y * y - lo * lo) / 2),
                2 * r * (mp.asin(v / r) - mp.asin(u / r)))

    def at(self, y, side=0):
        i = 0
        while i + 1 < len(self.arcs) and (y > self.arcs[i + 1][0][0] or side and y == self.arcs[i + 1][0][0]):
            i += 1
        arc, area, first, perimeter = self.arcs[i]
        da, df, dp = self.part(arc, y)
        a = area + da
        m = y * a - (first + df)
        if len(arc) == 3:
            return a, perimeter + dp, 2 * arc[2], m, TWO, ZERO
        _, _, centre, inset, r = arc
        v = y - centre
        w = mp.sqrt(r * r - v * v) if abs(v) < r else ZERO
        if w == 0:
            return a, perimeter + dp, ZERO, m, mp.inf, -mp.inf
        return a, perimeter + dp, 2 * (w - inset), m, 2 * r / w, -2 * v / w

    def full(self):
        a, p, _, m, _, _ = self.at(self.height)
        return a, p, ZERO, m, mp.inf, -mp.inf


def second_kind(phi, m):
    """Legendre's incomplete integral of the second kind, 0 <= m < 1, 0 <= phi <= pi, by Gauss's transformation (Abramowitz and Stegun 17.6)."""
    a, b, c = ONE, mp.sqrt(1 - m), mp.sqrt(m)
    total, sines, power = c * c / 2, ZERO, ONE
    while abs(c) > mpf(10) ** -40:  # the next one is its square
        step = mp.floor(phi / PI + mpf("0.5"))
        phi = phi + mp.atan(b / a * mp.tan(phi)) + step * PI if abs(phi / PI - mp.floor(phi / PI) - mpf("0.5")) > mpf(10) ** -60 else 2 * phi
        a, b, c = (a + b) / 2, mp.sqrt(a * b), (a - b) / 2
        power *= 2
        total += power * c * c / 2
        sines += c * mp.sin(phi)
    return phi / (power * a) * (1 - total) + sines


class Ellipse:
    breaks, closed = [], True

    def __init__(self, width, height):
        self.a, self.b, self.height = width / 2, height / 2, height
        self.disc = Arcs([(ZERO, height, self.b, ZERO, self.b)], height)
        self.flat = self.b <= self.a
        short, long = min(self.a, self.b), max(self.a, self.b)
        self.m = 1 - (short / long) ** 2
        self.quarter = second_kind(PI / 2, self.m)

    def perimeter(self, y):
        phi = mp.acos(max(-ONE, min(ONE, 1 - y / self.b)))
        if self.flat:
            return 2 * self.a * second_kind(phi, self.m)
        rest = PI / 2 - phi
        sign = 1 if rest >= 0 else -1
        return 2 * self.b * (self.quarter - sign * second_kind(abs(rest), self.m))

    def at(self, y, side=0):
        a, _, t, m, _, dt = self.disc.at(y)
        k = self.a / self.b
        half = t * k / 2
        if half == 0:
            return a * k, self.perimeter(y), ZERO, m * k, mp.inf, -mp.inf
        return a * k, self.perimeter(y), t * k, m * k, 2 * mp.sqrt(1 + (dt * k / 2) ** 2), dt * k

    def full(self):
        return self.at(self.height)


class Parabola:
    breaks, closed, height = [], False, None

    def __init__(self, top, height):
        self.top, self.at_height = top, height

    def at(self, y, side=0):
        half = self.top / 2 * mp.sqrt(y / self.at_height)
        k = 4 * self.at_height / self.top ** 2  # z = k x^2
        slope = 2 * k * half
        p = half * mp.sqrt(1 + slope * slope) + mp.asinh(slope) / (2 * k)
        a = 4 * half * y / 3
        return a, p, 2 * half, 2 * a * y / 5, 2 * mp.sqrt(1 + 1 / slope ** 2), half / y


class Table:
    closed = False

    def __init__(self, rows):
        self.rows = rows
        self.height = rows[-1][0]
        self.breaks = [r[0] for r in rows[:-1]]
        d, a, _, t = rows[0]
        self.m = t * d / a
        self.moments = [a * d / (self.m + 1)]
        for low, high in zip(rows, rows[1:]):
            h = high[0] - low[0]
            self.moments.append(self.moments[-1] + h * (low[1] + high[1]) / 2 + h * h * (low[3] - high[3]) / 12)

    def at(self, y, side=0):
        d, a, p, t = self.rows[0]
        i = (bisect.bisect_right if side else bisect.bisect_left)(self.breaks, y) - 1
        if i < 0:
            x, m = y / d, self.m
            share = x ** (m - 1)
            return (a * share * x, p * share, t * share, a * share * x * y / (m + 1),
                    p * (m - 1) * share / y, t * (m - 1) * share / y)
        low, high = self.rows[i], self.rows[i + 1]
        h = high[0] - low[0]
        s = (y - low[0]) / h
        # Hermite's cubic in powers of s
        c0, c1 = low[1], h * low[3]
        c2 = 3 * (high[1] - low[1]) - h * (2 * low[3] + high[3])
        c3 = -2 * (high[1] - low[1]) + h * (low[3] + high[3])
        dp = (high[2] - low[2]) / h
        return (c0 + s * (c1 + s * (c2 + s * c3)), low[2] + dp * (y - low[0]), (c1 + s * (2 * c2 + s * 3 * c3)) / h,
                self.moments[i] + h * s * (c0 + s * (c1 / 2 + s * (c2 / 3 + s * c3 / 4))), dp, (2 * c2 + 6 * s * c3) / (h * h))


def build(kind, s):
    """The section, its segments where it can be parted, its bank and the length of its bed."""
    v = {k: mpf(x) for k, x in s.items() if isinstance(x, (int, float)) and not isinstance(x, bool)}
    origin = (ZERO, ZERO)
    if kind == "rectangular":
        return straight(polyline([origin, (v["bottom_width"], ZERO)], ZERO, ZERO)), None, None, v["bottom_width"]
    if kind == "trapezoidal":
        return (straight(polyline([origin, (v["bottom_width"], ZERO)], v["left_side_slope"], v["right_side_slope"])), None, None,
                v["bottom_width"])
    if kind == "triangular":
        return straight(polyline([origin], v["left_side_slope"], v["right_side_slope"])), None, None, None
    if kind == "parabolic":
        return Parabola(v["top_width"], v["height"]), None, None, None
    if kind == "u_shaped":
        r = v["width"] / 2
        return Arcs([(ZERO, r, r, ZERO, r), (r, None, r)]), None, None, None
    if kind == "circular":
        r = v["diameter"] / 2
        return Arcs([(ZERO, 2 * r, r, ZERO, r)], v["diameter"]), None, v["diameter"], None
    if kind == "box":
        w, h, f = v["width"], v["height"], v.get("haunch", ZERO)
        stretches = [(ZERO, h - f, ZERO, ONE)] * 2 if h > f else []
        if f > 0:
            stretches += [(h - f, h, -ONE, mp.sqrt(2))] * 2
        return Straight(stretches, [(ZERO, w)], h, w - 2 * f), None, h, w
    if kind == "elliptical":
        return Ellipse(v["width"], v["height"]), None, v["height"], None
    if kind == "egg":
        # Invert and side arcs touch where the line through their centres, 2.5 r apart, meets them.
        h = v["height"]
        r = h / 3
        if s.get("inverted"):
            touch = h - r / 5
            return Arcs([(ZERO, r, r, ZERO, r), (r, touch, r, 2 * r, 3 * r), (touch, h, h - r / 2, ZERO, r / 2)], h), None, h, None
        return Arcs([(ZERO, r / 5, r / 2, ZERO, r / 2), (r / 5, 2 * r, 2 * r, 2 * r, 3 * r), (2 * r, h, 2 * r, ZERO, r)], h), None, h, None
    if kind == "horseshoe":
        h = v["height"]
        r = h / 2
        touch = r * (3 - mp.sqrt(7)) / 2
        return Arcs([(ZERO, touch, h, ZERO, h), (touch, r, r, r, h), (r, h, r, ZERO, r)], h), None, h, None
    if kind == "gutter":
        points = [origin]
        if "gutter_width" in v:
            points.append((v["gutter_width"], v["gutter_width"] * v["gutter_slope"]))
        return straight(polyline(points, ZERO, 1 / v["cross_slope"])), None, v["curb_height"], None
    if kind == "two_stage":
        b, h = v["bottom_width"] / 2, v["bench_height"]
        left, right = b + h * v["left_side_slope"], b + h * v["right_side_slope"]
        points = [(-left, h), (-b, ZERO), (b, ZERO), (right, h)]
        if v["left_bench_width"] > 0:
            points.insert(0, (-left - v["left_bench_width"], h))
        if v["right_bench_width"] > 0:
            points.append((right + v["right_bench_width"], h))
        segments = polyline(points, v["upper_side_slope"], v["upper_side_slope"])
        return straight(segments), segments, None, v["bottom_width"]
    if kind == "surveyed":
        points = [(mpf(x), mpf(z)) for x, z in s["points"]]
        lowest = min(z for _, z in points)
        points = [(x, z - lowest) for x, z in points]
        bank = min(points[0][1], points[-1][1])
        segments = polyline(points)
        return straight(segments), segments, bank if bank > 0 else None, None
    if kind == "tabulated":
        rows = [[mpf(x) for x in row] for row in s["rows"]]
        return Table(rows), None, rows[-1][0], None
    raise ValueError(kind)


# ---------------------------------------------------------------- friction

class Law:
    breaks = []
    parted = False  # whether alpha and beta vary

    def coefficients(self, y, g, side=0):
        """alpha, dalpha/ddepth, beta, dbeta/ddepth"""
        return ONE, ZERO, ONE, ZERO

    def at_slope(self, y, g, slope, side=0):
        """Conveyance and (dK/ddepth)/K; 0 and 1 where there is none."""
        return self.plain(y, g, side)

    def at_discharge(self, y, g, q):
        return self.plain(y, g, 0)[0]


class Power(Law):
    def __init__(self, factor, chezy=False):
        self.factor, self.chezy = factor, chezy

    def plain(self, y, g, side):
        a, p, t, _, dp, _ = g
        r = a / p
        if self.chezy:
            return self.factor * a * mp.sqrt(r), (3 * t / a - dp / p) / 2
        return self.factor * a * mp.cbrt(r * r), (5 * t / a - 2 * dp / p) / 3


class ByDepth(Law):
    def __init__(self, rows):
        self.rows = rows
        self.breaks = [d for d, _ in rows if d > 0]

    def plain(self, y, g, side):
        a, p, t, _, dp, _ = g
        n, dn = self.rows[-1][1], ZERO
        for i, (d, value) in enumerate(self.rows):
            if y < d or not side and y == d:
                n = value
                if i > 0:
                    d0, n0 = self.rows[i - 1]
                    dn = (value - n0) / (d - d0)
                    n = n0 + dn * (y - d0)
                break
        return a * mp.cbrt((a / p) ** 2) / n, (5 * t / a - 2 * dp / p) / 3 - dn / n


class Sand(Law):
    def __init__(self, ks, nu, gravity):
        self.ks, self.nu, self.g = ks, nu, gravity

    def at_slope(self, y, g, slope, side=0):
        a, p, t, _, dp, _ = g
        d = 4 * a / p
        speed = mp.sqrt(2 * self.g * d * slope)  # V = speed/sqrt(f), Re sqrt(f) = speed*d/nu
        rough, smooth = self.ks / (mpf("3.7") * d), mpf("2.51") * self.nu / (speed * d)
        if rough + smooth >= 1:
            return ZERO, ONE
        x = -2 * mp.log10(rough + smooth)
        dr = t / a - dp / p  # relative rate of the radius
        return a * mp.sqrt(2 * self.g * d) * x, t / a + dr / 2 + 2 / LN10 * (rough + 3 * smooth / 2) / (rough + smooth) * dr / x

    def at_discharge(self, y, g, q):
        a, p = g[:2]
        d = 4 * a / p
        rough, smooth = self.ks / (mpf("3.7") * d), mpf("2.51") * self.nu / (q / a * d)
        if rough >= 1:
            return ZERO
        # x = 1/sqrt(f) lies below the point where the logarithm vanishes.
        hi = (1 - rough) / smooth
        x = root(lambda x: x + 2 * mp.log10(rough + smooth * x), ZERO, hi)
        return a * mp.sqrt(2 * self.g * d) * x


class BedAndSides(Law):
    def __init__(self, width, bed, sides, how):
        self.width, self.bed, self.sides, self.how = width, bed, sides, how

    def plain(self, y, g, side):
        a, p, t, _, dp, _ = g
        e = mpf(3) / 2 if self.how == "horton_einstein" else TWO
        total = self.width * self.bed ** e + (p - self.width) * self.sides ** e
        rate = dp * self.sides ** e
        n = (total / p) ** (1 / e)
        return a * mp.cbrt((a / p) ** 2) / n, (5 * t / a - 2 * dp / p) / 3 - (rate / total - dp / p) / e


class Zones(Law):
    def __init__(self, segments, untils, n, how):
        limits = [None] + untils + [None]
        self.parts = [straight(segments, lo, hi) for lo, hi in zip(limits, limits[1:])]
        self.n, self.how = n, how
        self.parted = how in ("divided", "lotter")
        self.breaks = sorted({m for p in self.parts for m in p.breaks})
        self.last = None

    def sums(self, y, g, side):
        """K, dK, alpha, dalpha, beta, dbeta of the divided section."""
        if self.last and self.last[0] == (y, side):
            return self.last[1]
        a, _, t = g[:3]
        k1 = k2 = k3 = d1 = d2 = d3 = ZERO
        for part, n in zip(self.parts, self.n):
            ai, pi, ti, _, dpi, _ = part.at(y, side)
            if not (ai > 0 and pi > 0):
                continue
            v = mp.cbrt((ai / pi) ** 2) / n
            k, widening, speeding = ai * v, ti / ai, (ti / ai - dpi / pi) * 2 / 3  # Ki, and the relative rates of Ai and of vi = Ki/Ai
            term, rate = k, k * (widening + speeding)
            k1, d1 = k1 + term, d1 + rate
            rate = v * (rate + k * speeding)
            term = term * v
            k2, d2 = k2 + term, d2 + rate
            rate = v * (rate + term * speeding)
            k3, d3 = k3 + term * v, d3 + rate
        alpha, beta = k3 * a * a / k1 ** 3, k2 * a / (k1 * k1)
        answer = (k1, d1, alpha, alpha * (d3 / k3 + 2 * t / a - 3 * d1 / k1), beta, beta * (d2 / k2 + t / a - 2 * d1 / k1))
        self.last = ((y, side), answer)
        return answer

    def coefficients(self, y, g, side=0):
        return self.sums(y, g, side)[2:] if self.parted else (ONE, ZERO, ONE, ZERO)

    def plain(self, y, g, side):
        if self.parted:
            k, dk = self.sums(y, g, side)[:2]
            return k, dk / k
        a, p, t, _, dp, _ = g
        e = mpf(3) / 2 if self.how == "horton_einstein" else TWO
        total = rate = ZERO
        for part, n in zip(self.parts, self.n):
            h = part.at(y, side)
            total += h[1] * n ** e
            rate += h[4] * n ** e
        n = (total / p) ** (1 / e)
        return a * mp.cbrt((a / p) ** 2) / n, (5 * t / a - 2 * dp / p) / 3 - (rate / total - dp / p) / e


def build_law(law, segments, bed, gravity):
    if law is None:
        return None
    if "manning" in law:
        return Power(1 / mpf(law["manning"]))
    if "strickler" in law:
        return Power(mpf(law["strickler"]))
    if "chezy" in law:
        return Power(mpf(law["chezy"]), True)
    if "sand_roughness" in law:
        return Sand(mpf(law["sand_roughness"]), mpf(law["kinematic_viscosity"]), gravity)
    if "manning_by_depth" in law:
        return ByDepth([(mpf(d), mpf(n)) for d, n in law["manning_by_depth"]])
    if "bed" in law:
        return BedAndSides(bed, mpf(law["bed"]), mpf(law["sides"]), law["combine"])
    return Zones(segments, [mpf(x) for x in law["until"]], [mpf(x) for x in law["zones"]], law["combine"])


# ---------------------------------------------------------------- roots

def root(f, a, b, fa=None, fb=None):
    """The root of f between a and b by Chandrupatla's method."""
    fa = f(a) if fa is None else fa
    fb = f(b) if fb is None else fb
    if fa == 0:
        return a
    if fb == 0:
        return b
    if (fa > 0) == (fb > 0):
        raise Skip("no bracket")
    t = mpf("0.5")
    for _ in range(500):
        x = a + t * (b - a)
        fx = f(x)
        if (fx > 0) == (fa > 0):
            c, fc = a, fa
        else:
            c, b, fc, fb = b, a, fb, fa
        a, fa = x, fx
        best, fbest = (a, fa) if abs(fa) < abs(fb) else (b, fb)
        tolerance = mpf(10) ** -48 * abs(best)
        t1 = tolerance / abs(b - c) if b != c else ONE
        if fbest == 0 or t1 > mpf("0.5") or abs(b - a) < tolerance:
            return best
        xi, phi = (a - b) / (c - b), (fa - fb) / (fc - fb)
        if phi * phi < xi and (1 - phi) ** 2 < 1 - xi:
            t = fa / (fb - fa) * fc / (fb - fc) + (c - a) / (b - a) * fa / (fc - fa) * fb / (fc - fb)
        else:
            t = mpf("0.5")
        t = min(1 - t1, max(t1, t))
    raise Skip("root did not converge")


def wide_root(f, a, b):
    """A root whose bracket may span many orders of magnitude; a may be 0 and b None."""
    if b is None:
        b = 2 * a if a > 0 else ONE
        fa = f(a) if a > 0 else None
        if fa is None:
            a = ONE
            fa = f(a)
            fb = fa
            while (fa > 0) == (fb > 0) and a > mpf(10) ** -60:
                a, b = a / 8, b * 8
                fa, fb = f(a), f(b)
        else:
            fb = f(b)
            while (fb > 0) == (fa > 0):
                if b > mpf(10) ** 40:
                    raise Skip("no bracket")
                a, fa = b, fb
                b *= 4
                fb = f(b)
    else:
        fb = f(b)
        if a == 0:
            a, fa = b / 8, f(b / 8)
            while (fa > 0) == (fb > 0):
                if a < mpf(10) ** -60:
                    raise Skip("no bracket")
                b, fb = a, fa
                a /= 8
                fa = f(a)
        else:
            fa = f(a)
    while a > 0 and b > 8 * a:
        x = mp.sqrt(a * b)
        fx = f(x)
        if (fx > 0) == (fa > 0):
            a, fa = x, fx
        else:
            b, fb = x, fx
    return root(f, a, b, fa, fb)


SIGMOID = {}


def sigmoid(lo, hi, step):
    key = (lo, hi, step)
    if key not in SIGMOID:
        n = round((hi - lo) / step)
        SIGMOID[key] = [1 / (1 + mp.exp(-(mpf(lo) + mpf(hi - lo) * i / n))) for i in range(n + 1)]
    return SIGMOID[key]


class Channel:
    def __init__(self, case):
        self.case = case
        self.gravity = mpf(case["gravity"])
        self.slope = mpf(case["bed_slope"])
        self.cos = mp.sqrt(1 - self.slope ** 2)
        self.barrels = case.get("barrels", 1)
        self.section, self.segments, self.bank, bed = build(case["kind"], case["section"])
        self.law = build_law(case.get("law"), self.segments, bed, self.gravity)
        if "bank_height" in case:
            self.bank = mpf(case["bank_height"])
        self.alpha = mpf(case["energy_coefficient"]) if "energy_coefficient" in case else None
        self.beta = mpf(case["momentum_coefficient"]) if "momentum_coefficient" in case else None
        breaks = set(self.section.breaks) | set(self.law.breaks if self.law else [])
        height = self.section.height
        self.ends = [ZERO] + sorted(b for b in breaks if height is None or b < height) + [height]
        self.samples = None
        self.energy_terms = self.turning = None

    def set_discharge(self, q):
        self.total = mpf(q)
        self.q = self.total / self.barrels
        self.head = self.q ** 2 / self.gravity

    def coefficients(self, y, g, side=0):
        a, da, b, db = self.law.coefficients(y, g, side) if self.law else (ONE, ZERO, ONE, ZERO)
        if self.alpha is not None:
            a, da = self.alpha, ZERO
        if self.beta is not None:
            b, db = self.beta, ZERO
        return a, da, b, db

    # Curves: values, and rates that have the sign of the derivative.
    def energy_term(self, y, g, side=0):
        """dE/ddepth = cos - Q^2/g times this."""
        alpha, dalpha, _, _ = self.coefficients(y, g, side)
        return (alpha * g[2] / g[0] - dalpha / 2) / g[0] ** 2

    def energy(self, y, side=0):
        g = self.section.at(y, side)
        return y * self.cos + self.coefficients(y, g, side)[0] * self.head / (2 * g[0] ** 2)

    def energy_rate(self, y, side=0, g=None):
        g = g or self.section.at(y, side)
        return self.cos - self.head * self.energy_term(y, g, side)

    def force(self, y, side=0):
        g = self.section.at(y, side)
        return self.coefficients(y, g, side)[2] * self.head / g[0] + self.cos * g[3]

    def force_rate(self, y, side=0, g=None):
        g = g or self.section.at(y, side)
        _, _, beta, dbeta = self.coefficients(y, g, side)
        return self.cos * g[0] + self.head / g[0] * (dbeta - beta * g[2] / g[0])

    def conveyance(self, y, side=0):
        return self.law.at_slope(y, self.section.at(y, side), self.slope, side)[0]

    def conveyance_rate(self, y, side=0, g=None):
        g = g or self.section.at(y, side)
        return self.law.at_slope(y, g, self.slope, side)[1]

    def sample(self):
        """For every smooth piece its sample points (depth, side, geometry), both ends included where they are finite and not 0."""
        if self.samples is not None:
            return self.samples
        step = 0.6 if len(self.ends) < 8 else 1.0 if len(self.ends) < 16 else 1.5
        self.samples = []
        for lo, hi in zip(self.ends, self.ends[1:]):
            ys = []
            if lo > 0:
                ys.append((lo, 1))
            if hi is None:
                unit = lo if lo > 0 else ONE
                for s in sigmoid(-45, 45, step):
                    ys.append((lo + unit * s / (1 - s), 0))
            else:
                for s in sigmoid(-55 if lo == 0 else -38, 38, step):
                    ys.append((lo + (hi - lo) * s, 0))
                ys.append((hi, 0))
            self.samples.append([(y, side, self.section.at(y, side)) for y, side in ys])
        return self.samples

    def branches(self, rate, begins_rising, rates=None):
        """Stretches (lo, hi, rising, first, last) on which a curve is smooth and monotone."""
        out = []
        for index, samples in enumerate(self.sample()):
            values = rates[index] if rates else [rate(y, side, g) for y, side, g in samples]
            lo, hi = self.ends[index], self.ends[index + 1]
            points = [(y, side, v) for (y, side, _), v in zip(samples, values)]
            # Where the rate comes nearest to zero without passing it, look closer.
            extra = []
            for (y0, _, v0), (y1, _, v1), (y2, _, v2) in zip(points, points[1:], points[2:]):
                if (v0 > 0) == (v1 > 0) == (v2 > 0) and abs(v1) <= abs(v0) and abs(v1) <= abs(v2):
                    if abs(v1) == abs(v0) == abs(v2) or abs(v1) > abs(v0) * (1 - mpf(10) ** -30):
                        continue
                    found = self.golden(rate, y0, y1, y2, v1)
                    if found:
                        extra.append(found)
            if extra:
                points = sorted(points + [(y, 0, v) for y, v in extra], key=lambda p: (p[0], -p[1]))
            rising = begins_rising if lo == 0 else points[0][2] > 0
            start, first, before = lo, True, None
            for y, side, v in points:
                if (v > 0) != rising:
                    if before is None:
                        turn = wide_root(lambda y: rate(y), ZERO, y)
                    else:
                        y0, side0, v0 = before
                        turn = root(lambda x: rate(x, 1 if side0 and x == y0 else 0), y0, y, v0, v)
                    out.append((start, turn, rising, first, False))
                    start, first, rising = turn, False, not rising
                before = (y, side, v)
            if hi is None and not rising:
                raise Skip("no end of a falling branch")
            out.append((start, hi, rising, first, True))
        return out

    @staticmethod
    def golden(rate, a, b, d, vb):
        positive = vb > 0
        best = abs(vb)
        for _ in range(60):
            if d - b > b - a:
                x = b + mpf("0.38196601125") * (d - b)
            else:
                x = b - mpf("0.38196601125") * (b - a)
            v = rate(x)
            if (v > 0) != positive:
                return x, v
            v = abs(v)
            if v < best:
                if x > b:
                    a = b
                else:
                    d = b
                b, best = x, v
            elif x > b:
                d = x
            else:
                a = x
        return None

    def on_branch(self, branch, value, want):
        """The depth on a branch at which value is want, None where there is none. value(0) is 0 or infinite as the branch says."""
        lo, hi, rising, first, _ = branch
        side = 1 if first else 0
        if lo > 0:
            from_ = value(lo, side)
            if rising and from_ >= want or not rising and from_ <= want:
                return None
        if hi is not None:
            to = value(hi)
            if rising and to < want or not rising and to > want:
                return None

        def f(y):
            return value(y, side if y == lo else 0) - want
        return wide_root(f, lo, hi)

    # Characteristic depths.
    def energy_rates(self):
        if self.energy_terms is None:
            self.energy_terms = [[self.energy_term(y, g, side) for y, side, g in samples] for samples in self.sample()]
        return [[self.cos - self.head * t for t in terms] for terms in self.energy_terms]

    def energy_branches(self):
        return self.branches(self.energy_rate, False, self.energy_rates())

    def conveyance_branches(self):
        return self.branches(self.conveyance_rate, True)

    def normal(self, branches):
        if self.slope == 0:
            return [], "horizontal_bed"
        if self.slope < 0:
            return [], "adverse_bed"
        want = self.q / mp.sqrt(self.slope)
        found = []
        greatest = ZERO
        for b in branches:
            y = self.on_branch(b, self.conveyance, want)
            if y is not None:
                found.append(y)
            if b[0] > 0:
                greatest = max(greatest, self.conveyance(b[0], 1 if b[3] else 0))
            if b[1] is not None:
                greatest = max(greatest, self.conveyance(b[1]))
        # Where the conveyance at a turning point or break is all but the one asked for, nothing is certain.
        for b in branches:
            for y, side in ((b[0], 1 if b[3] else 0), (b[1], 0)):
                if y is not None and y > 0 and abs(self.conveyance(y, side) / want - 1) < mpf(10) ** -9:
                    raise Skip("tangent")
        if found:
            return found, ""
        if greatest == 0:
            return [], "no_conveyance"
        if greatest > want:
            return [], "conveyance_jumps"
        return [], "beyond_crown" if self.section.closed else "beyond_table"

    def critical(self, branches):
        found, kinked = [], False
        for below, above in zip(branches, branches[1:]):
            if not below[2] and above[2]:
                if above[3]:
                    kinked = True
                else:
                    found.append(above[0])
        if found:
            return found, ""
        return [], "minimum_at_kink" if kinked else "fills_first"

    def turns(self):
        """For every piece the samples of the energy's term with its turning points between them, so that no pair of critical depths hides."""
        if self.turning is None:
            self.turning = []
            for samples, terms in zip(self.sample(), self.energy_terms):
                points = [(y, side, term) for (y, side, _), term in zip(samples, terms)]
                extra = []
                for (y0, _, t0), (y1, _, t1), (y2, _, t2) in zip(points, points[1:], points[2:]):
                    if (t1 > t0 and t1 > t2 or t1 < t0 and t1 < t2) and abs(t1 - t0) > abs(t1) * mpf(10) ** -20:
                        sign = 1 if t1 > t0 else -1
                        for _ in range(70):
                            left = y1 - y0 > y2 - y1
                            x = y1 - mpf("0.38196601125") * (y1 - y0) if left else y1 + mpf("0.38196601125") * (y2 - y1)
                            t = self.energy_term(x, self.section.at(x))
                            if sign * t > sign * t1:
                                y0, y1, y2, t1 = (y0, x, y1, t) if left else (y1, x, y2, t)
                            elif left:
                                y0 = x
                            else:
                                y2 = x
                        extra.append((y1, 0, t1))
                self.turning.append(sorted(points + extra, key=lambda p: (p[0], -p[1])))
        return self.turning

    def lowest_critical(self, cos):
        """The lowest critical depth for another cosine."""
        limit = cos / self.head
        for points in self.turns():
            before = None
            for y, side, term in points:
                rises = term < limit
                if rises and before is not None and not before[0]:
                    _, y0, side0, term0 = before

                    def rate(x):
                        s = side0 if x == y0 else 0
                        return limit - self.energy_term(x, self.section.at(x, s), s)
                    return root(rate, y0, y, limit - term0, limit - term)
                before = (rises, y, side, term)
        return None

    def critical_slope(self):
        """The critical slope, or None where there is none below 1."""
        def excess(s):
            y = self.lowest_critical(mp.sqrt((1 - s) * (1 + s)))
            if y is None:
                return None
            k = self.law.at_discharge(y, self.section.at(y), self.q)
            if k == 0:
                return -mp.inf
            return s - (self.q / k) ** 2

        grid = [mpf(10) ** e for e in (-30, -12, -8, -6, -5, -4, -3, mpf("-2.5"), -2, mpf("-1.5"), -1)] + [
            mpf(x) / 100 for x in (20, 30, 40, 50, 60, 70, 80, 90, 97, 99)] + [1 - mpf(10) ** -e for e in (4, 7, 12, 20)]
        values = [excess(s) for s in grid]
        brackets = []
        for (a, fa), (b, fb) in zip(zip(grid, values), zip(grid[1:], values[1:])):
            if fa is None:
                if fb is not None:
                    raise Skip("critical depth only on a steep slope")
                continue
            if fb is None:
                while b - a > mpf(10) ** -25:  # up to the steepest slope with a critical depth
                    m = (a + b) / 2
                    fm = excess(m)
                    if fm is None:
                        b = m
                    else:
                        if (fm > 0) != (fa > 0):
                            brackets.append((a, m, fa, fm))
                        a, fa = m, fm
            elif (fa > 0) != (fb > 0):
                brackets.append((a, b, fa, fb))
        if len(brackets) > 1:
            raise Skip("several critical slopes")
        if not brackets:
            if values[0] is not None and values[0] > 0:
                raise Skip("tiny critical slope")
            return None
        a, b, fa, fb = brackets[0]
        while mp.isinf(fa):  # no conveyance yet at the gentler end
            m = (a + b) / 2
            fm = excess(m)
            if b - a < mpf(10) ** -25:
                raise Skip("critical slope where conveyance begins")
            if mp.isinf(fm):
                a = m
            elif fm > 0:
                b, fb = m, fm
            else:
                a, fa = m, fm
        s = root(excess, a, b, fa, fb)
        if s > 1 - mpf(10) ** -12:
            raise Skip("1 to all that float64 can tell")
        if not abs(excess(s)) < mpf(10) ** -40 * s:
            return None  # the lowest critical depth gives way to a higher one there
        return s

    def capacity(self, branches):
        best, depth = self.conveyance(self.bank), self.bank
        for lo, hi, _, _, _ in branches:
            if hi is not None and hi < self.bank:
                k = self.conveyance(hi)
                if abs(k / best - 1) < mpf(10) ** -12 if best > 0 else False:
                    raise Skip("two capacities")
                if k > best:
                    best, depth = k, hi
        return best, depth

    def conjugate(self, y, branches, value, rate):
        """The nearest depth of equal value on a branch of the opposite direction, or None."""
        direction = rate(y) > 0
        want = value(y)
        found = []
        for b in branches:
            if b[2] == direction:
                continue
            x = self.on_branch(b, value, want)
            if x is not None:
                found.append((abs(x - y), x))
            for end, side in ((b[0], 1 if b[3] else 0), (b[1], 0)):
                if end is not None and end > 0 and end != y and abs(value(end, side) / want - 1) < mpf(10) ** -40:
                    raise Skip("conjugate depth at a turn or break")
        if not found:
            return None
        found.sort()
        if found[0][0] == 0:
            raise Skip("a depth at a kink")
        if len(found) > 1 and found[1][0] < found[0][0] * (1 + mpf(10) ** -6):
            raise Skip("two conjugate depths equally near")
        return found[0][1]

    def state(self, y, discharge):
        full = self.section.closed and y >= self.section.height
        g = self.section.full() if full else self.section.at(y)
        a, p, t, m, dp, dt = g
        s = {"area": a, "wetted_perimeter": p, "top_width": t, "moment": m, "hydraulic_radius": a / p, "hydraulic_depth": None if full else a / t,
             "perimeter_rate": None if full else dp, "top_width_rate": None if full else dt, "centroid_depth": m / a}
        regime = ""
        if self.law and self.slope > 0:
            k = self.law.at_slope(y, g, self.slope)[0]
            s["uniform_discharge"] = self.barrels * k * mp.sqrt(self.slope)
            s["conveyance"] = k
        elif self.law and not isinstance(self.law, Sand):
            s["conveyance"] = self.law.plain(y, g, 0)[0]
        if discharge:
            v = self.q / a
            alpha, _, beta, _ = self.coefficients(y, g)
            s["velocity"] = v
            s["velocity_head"] = alpha * v * v / (2 * self.gravity)
            s["specific_energy"] = y * self.cos + s["velocity_head"]
            s["specific_force"] = beta * self.head / a + self.cos * m
            if full:
                regime = "full"
            else:
                square = self.head * self.energy_term(y, g) / self.cos
                if square >= 0:
                    s["froude_number"] = mp.sqrt(square)
                f = s.get("froude_number", ZERO)
                if abs(abs(f - 1) - mpf(10) ** -6) < mpf(10) ** -12:
                    raise Skip("regime on the edge")
                regime = "critical" if abs(f - 1) <= mpf(10) ** -6 else "supercritical" if f > 1 else "subcritical"
            if self.law:
                k = self.law.at_discharge(y, g, self.q)
                s["conveyance"] = k if k > 0 else None
                if k > 0:
                    s["friction_slope"] = (self.q / k) ** 2
                    s["bed_shear_stress"] = 1000 * self.gravity * s["hydraulic_radius"] * s["friction_slope"]
                    s["stream_power"] = s["bed_shear_stress"] * v
        return s, regime

    def slope_class(self, normal, critical):
        if self.slope == 0:
            return "horizontal"
        if self.slope < 0:
            return "adverse"
        if not normal:
            return "mild" if critical else ""
        if critical:
            apart = abs(normal[0] - critical[0]) / critical[0]
            if abs(apart - mpf(10) ** -6) < mpf(10) ** -9:
                raise Skip("class on the edge")
            if apart <= mpf(10) ** -6:
                return "critical"
        return "mild" if self.energy_rate(normal[0]) > 0 else "steep"

    def curve(self, y, state, regime, name, normal):
        for n in normal:
            if abs(abs(y - n) / n - mpf(10) ** -6) < mpf(10) ** -9:
                raise Skip("curve on the edge")
            if abs(y - n) <= mpf(10) ** -6 * n:
                return "uniform"
        sf = state.get("friction_slope")
        if not name or regime == "full" or sf is None:
            return ""
        if abs(sf - self.slope) < mpf(10) ** -11 * sf:
            raise Skip("curve on the edge")
        number = "2"
        if regime == "subcritical" and self.slope > sf:
            number = "1"
        if regime == "supercritical" and self.slope < sf:
            number = "3"
        return name[0].upper() + number


# ---------------------------------------------------------------- cases

def nice(x, rng):
    """A float64 like those that people write, or any."""
    return float(x) if rng.random() < 0.4 else float("%.*g" % (rng.choice((2, 3, 4, 6)), float(x)))


def draw_section(kind, rng):
    def size(lo=-1.7, hi=2.4):
        return nice(10 ** rng.uniform(lo, hi), rng)

    def side():
        return rng.choice([0.0, 0.5, 1.0, 1.5, 2.0, 3.0, nice(rng.uniform(0.05, 8), rng)])

    if kind == "rectangular":
        return {"bottom_width": size()}
    if kind == "trapezoidal":
        left = side()
        return {"bottom_width": size(), "left_side_slope": left, "right_side_slope": left if rng.random() < 0.6 else side()}
    if kind == "triangular":
        left = side()
        right = left if rng.random() < 0.5 else side()
        return {"left_side_slope": left, "right_side_slope": right if left + right > 0 else 1.0}
    if kind == "parabolic":
        return {"top_width": size(), "height": size(-1.7, 1.5)}
    if kind == "u_shaped":
        return {"width": size()}
    if kind == "circular":
        return {"diameter": size(-1.7, 1.5)}
    if kind == "box":
        w, h = size(-1, 1.5), size(-1, 1.2)
        s = {"width": w, "height": h}
        if rng.random() < 0.55:
            s["haunch"] = nice(min(w / 2, h) * rng.choice([0.05, 0.2, 0.4, 0.7]), rng)
        return s
    if kind == "elliptical":
        h = size(-1.3, 1.2)
        return {"width": nice(h * 10 ** rng.uniform(-0.7, 0.7), rng), "height": h}
    if kind == "egg":
        return {"height": size(-1, 1.1), "inverted": rng.random() < 0.5}
    if kind == "horseshoe":
        return {"height": size(-0.5, 1.4)}
    if kind == "gutter":
        s = {"cross_slope": nice(rng.uniform(0.005, 0.08), rng), "curb_height": nice(rng.uniform(0.08, 0.3), rng)}
        if rng.random() < 0.6:
            s["gutter_width"] = nice(rng.uniform(0.2, 1.2), rng)
            s["gutter_slope"] = nice(rng.uniform(0.02, 0.15), rng)
        return s
    if kind == "two_stage":
        left, b = side(), size(-0.5, 1.8)
        bench = nice(b * rng.uniform(0, 3), rng)
        return {"bottom_width": b, "left_side_slope": left, "right_side_slope": left if rng.random() < 0.6 else side(),
                "bench_height": nice(b * 10 ** rng.uniform(-1.3, 0.3), rng), "left_bench_width": 0.0 if rng.random() < 0.1 else bench,
                "right_bench_width": bench if rng.random() < 0.6 else nice(b * rng.uniform(0, 6), rng), "upper_side_slope": side()}
    if kind == "surveyed":
        return {"points": draw_points(rng)}
    if kind == "tabulated":
        return {"rows": draw_rows(rng)}
    raise ValueError(kind)


def draw_points(rng):
    n = rng.choice([3, 4, 5, 6, 8, 10, 13, 17])
    width = 10 ** rng.uniform(-0.3, 2.2)
    depth = width * 10 ** rng.uniform(-1.6, -0.2)
    datum = rng.choice([0.0, 0.0, 12.5, 431.07, -3.2])
    xs = sorted(rng.uniform(0, width) for _ in range(n))
    xs[0], xs[-1] = 0.0, width
    start = rng.choice([0.0, -width / 2])
    troughs = rng.choice([1, 1, 1, 2, 3])
    points = []
    for x in xs:
        u = x / width
        bowl = abs(2 * u - 1) ** 1.5 if troughs == 1 else 0.5 * (1 + mp_cos(u * troughs)) * (0.55 + 0.45 * abs(2 * u - 1))
        points.append([x + start, datum + depth * (bowl + rng.uniform(-0.08, 0.08))])
    if rng.random() < 0.4:  # a level stretch
        i = rng.randrange(n - 1)
        points[i + 1][1] = points[i][1]
    if rng.random() < 0.4:  # a wall
        i = rng.randrange(n - 1)
        points[i + 1][0] = points[i][0] = points[i][0] if i == 0 else points[i + 1][0]
        if i + 1 == n - 1:
            points[i][0] = points[i + 1][0]
    digits = rng.choice([2, 3, 3, 16])
    points = [[round(x, digits), round(z, digits)] for x, z in points]
    for i in range(1, len(points)):
        if points[i][0] < points[i - 1][0] or points[i] == points[i - 1]:
            raise Skip("offsets fall or points coincide")
        if i > 1 and points[i][0] == points[i - 1][0] == points[i - 2][0]:
            raise Skip("a wall of three points")
    if len({z for _, z in points}) < 2 or points[0][0] == points[-1][0]:
        raise Skip("flat")
    if max(points[0][1], points[-1][1]) == min(z for _, z in points):
        raise Skip("no sides")
    return points


def mp_cos(turns):
    return float(mp.cos(2 * PI * turns))


def draw_rows(rng):
    n = rng.choice([2, 3, 4, 6, 9, 14])
    scale = 10 ** rng.uniform(-1, 1.5)
    d = scale * rng.uniform(0.05, 0.3)
    t = scale * 10 ** rng.uniform(-0.5, 0.8)
    m = rng.choice([1.0, 1.5, 2.0, rng.uniform(1, 2.5)])
    a, p = t * d / m, t * rng.uniform(1.02, 1.3)
    rows = [[d, a, p, t]]
    for _ in range(n - 1):
        step = scale * rng.uniform(0.05, 0.4)
        wider = max(0.25 * t, t * rng.uniform(0.75, 1.4))
        a += step * (t + wider) / 2 * rng.uniform(0.93, 1.07)
        p += max(2 * step, abs(wider - t)) * rng.uniform(1.0, 1.3)
        d += step
        t = wider
        rows.append([d, a, p, t])
    rows = [[nice(x, rng) for x in row] for row in rows]
    for low, high in zip(rows, rows[1:]):
        if not all(b > a for a, b in zip(low[:3], high[:3])):
            raise Skip("a table that does not rise")
        mean = (high[1] - low[1]) / (high[0] - low[0])
        # The derivative of the cubic at s: keep well above zero.
        for i in range(1, 40):
            s = i / 40
            if low[3] * (1 - s) * (1 - 3 * s) + high[3] * s * (3 * s - 2) + 6 * mean * s * (1 - s) < 0.1 * min(low[3], high[3], mean):
                raise Skip("a table whose width falls to zero")
    if rows[0][3] * rows[0][0] / rows[0][1] < 1:
        raise Skip("a section wider below its first row")
    return rows


def draw_law(kind, section, rng, gauge):
    """A law; gauge is a typical depth."""
    def n():
        return nice(10 ** rng.uniform(-2.05, -1.0), rng)

    x = rng.random()
    if kind in ("two_stage", "surveyed") and x < 0.5:
        if kind == "two_stage":
            half = section["bottom_width"] / 2
            left = half + section["bench_height"] * section["left_side_slope"]
            right = half + section["bench_height"] * section["right_side_slope"]
            lo, hi = -left - section["left_bench_width"], right + section["right_bench_width"]
            picks = [-half, half, -left, right]
        else:
            lo, hi = section["points"][0][0], section["points"][-1][0]
            picks = [x for x, _ in section["points"][1:-1]]
        count = rng.choice([1, 2, 2, 3])
        untils = set()
        for _ in range(count):
            untils.add(rng.choice(picks) if picks and rng.random() < 0.5 else nice(rng.uniform(lo, hi), rng))
        untils = sorted(u for u in untils if lo < u < hi)
        if not untils:
            raise Skip("no zones")
        if rng.random() < 0.4:  # very different ones
            n = lambda: nice(10 ** rng.uniform(-2.3, -0.2), rng)
        return {"until": untils, "zones": [n() for _ in range(len(untils) + 1)],
                "combine": rng.choice(["divided", "divided", "lotter", "horton_einstein", "pavlovskii"])}
    if kind in ("rectangular", "trapezoidal", "box", "two_stage") and x < 0.62 and x > 0.45:
        return {"bed": n(), "sides": n(), "combine": rng.choice(["horton_einstein", "pavlovskii"])}
    x = rng.random()
    if x < 0.36:
        return {"manning": n()}
    if x < 0.46:
        return {"strickler": nice(10 ** rng.uniform(1, 2), rng)}
    if x < 0.6:
        return {"chezy": nice(10 ** rng.uniform(1.2, 2), rng)}
    if x < 0.84:
        return {"sand_roughness": nice(gauge * 10 ** rng.uniform(-5, -0.7), rng), "kinematic_viscosity": rng.choice([1.14e-6, 1.14e-6, 1.31e-6, 1e-5])}
    rows, d = [], rng.choice([0.0, gauge * rng.uniform(0.05, 0.3)])
    for _ in range(rng.choice([1, 2, 3, 4])):
        rows.append([nice(d, rng), n()])
        d += gauge * rng.uniform(0.1, 0.6)
    if any(b[0] <= a[0] for a, b in zip(rows, rows[1:])):
        raise Skip("depths do not rise")
    return {"manning_by_depth": rows}


def draw_slope(rng):
    x = rng.random()
    if x < 0.62:
        return nice(10 ** rng.uniform(-5.5, -1), rng)
    if x < 0.82:
        return nice(rng.uniform(0.1, 0.9), rng)
    if x < 0.84:
        return 0.9
    if x < 0.92:
        return 0.0
    return -nice(10 ** rng.uniform(-5, -0.05), rng)


def gauge_of(kind, section, sec):
    if sec.height is not None:
        return float(sec.height)
    return {"rectangular": lambda: section["bottom_width"] / 2, "trapezoidal": lambda: section["bottom_width"] / 2, "triangular": lambda: 1.0,
            "parabolic": lambda: section["height"], "u_shaped": lambda: section["width"], "gutter": lambda: section["curb_height"],
            "two_stage": lambda: 2 * section["bench_height"],
            "surveyed": lambda: max(z for _, z in section["points"]) - min(z for _, z in section["points"])}[kind]()


def draw(kind, rng, smooth_benches=False):
    """One case. With smooth_benches the energy coefficient of a two-stage channel rises so fast above its benches that F^2 may be negative."""
    section = draw_section(kind, rng)
    sec = build(kind, section)[0]
    gauge = gauge_of(kind, section, sec)
    case = {"kind": kind, "section": section, "gravity": 9.80665 if rng.random() < 0.7 else nice(rng.choice([9.81, 1.62, 3.71, rng.uniform(4, 25)]), rng),
            "bed_slope": draw_slope(rng)}
    if rng.random() < 0.94:
        case["law"] = draw_law(kind, section, rng, gauge)
    if smooth_benches:
        for member in ("left_bench_width", "right_bench_width"):
            section[member] = nice(section["bottom_width"] * rng.uniform(0.5, 6), rng)
        half, h = section["bottom_width"] / 2, section["bench_height"]
        smooth = nice(rng.uniform(0.005, 0.012), rng)
        case["law"] = {"until": [-half - h * section["left_side_slope"], half + h * section["right_side_slope"]],
                       "zones": [smooth, nice(rng.uniform(0.1, 0.6), rng), smooth], "combine": rng.choice(["divided", "lotter"])}
        sec = build(kind, section)[0]
    if rng.random() < 0.2:
        case["barrels"] = rng.randint(2, 7)
    if rng.random() < 0.15:
        case["energy_coefficient"] = nice(rng.uniform(1, 1.6), rng)
    if rng.random() < 0.15:
        case["momentum_coefficient"] = nice(rng.uniform(1, 1.25), rng)
    if not sec.closed and kind != "tabulated" and rng.random() < 0.4:
        case["bank_height"] = nice(gauge * rng.uniform(0.3, 2), rng)
    channel = Channel(case)

    # A discharge: one that flows at some depth uniformly or critically, or any.
    open_end = sec.height is None
    share = rng.choice([rng.uniform(0.02, 0.98), rng.uniform(0.02, 0.98), 10 ** rng.uniform(-6, -1), 1 - 10 ** rng.uniform(-5, -1)])
    target = mpf(gauge * share * (rng.choice([0.3, 1, 1, 1.5, 4]) if open_end else 1))
    inner = channel.ends[1:-1]
    if inner and rng.random() < 0.4:  # near a bench or another break
        target = rng.choice(inner) * (1 + rng.choice([-1, -1, 1]) * mpf(10) ** rng.uniform(-3, -0.3))
    x = rng.random()
    if x < 0.45 and channel.law and channel.slope > 0:
        q = channel.barrels * channel.conveyance(target) * mp.sqrt(channel.slope)
    elif x < 0.85:
        g = sec.at(target)
        q = channel.barrels * mp.sqrt(channel.gravity * channel.cos * g[0] ** 3 / g[2]) if g[2] > 0 else mpf(1)
    else:
        q = mpf(10) ** rng.uniform(-9, 6)
    q = nice(q, rng)
    if not 1e-9 <= q <= 1e6:
        raise Skip("discharge out of range")
    with_discharge = rng.random() < 0.94
    channel.set_discharge(q)
    answer = {}
    critical = normal = []
    energy_branches = None
    if with_discharge:
        case["discharge"] = q
        energy_branches = channel.energy_branches()
        critical, critical_absent = channel.critical(energy_branches)
        answer["critical"] = critical
        if critical_absent:
            answer["critical_absent"] = critical_absent
        if channel.law:
            branches = channel.conveyance_branches() if channel.slope > 0 else []
            normal, normal_absent = channel.normal(branches)
            answer["normal"] = normal
            if normal_absent:
                answer["normal_absent"] = normal_absent
            answer["slope_class"] = channel.slope_class(normal, critical)
            try:
                answer["critical_slope"] = channel.critical_slope()
            except Skip:
                pass
            surcharged = False
            if channel.bank is not None and channel.slope > 0:
                k, depth = channel.capacity(branches)
                carried = channel.barrels * k * mp.sqrt(channel.slope)
                answer["capacity"] = [carried, depth]
                answer["ratio"] = mpf(q) / carried if carried > 0 else None
                surcharged = channel.section.closed and mpf(q) > carried
                if carried > 0 and abs(answer["ratio"] - 1) < mpf(10) ** -9:
                    raise Skip("just surcharged")
            else:
                answer["capacity"] = answer["ratio"] = None
            if channel.section.closed:
                y = channel.section.height
                full = channel.section.full()
                if channel.slope > 0:
                    answer["full_discharge"] = channel.barrels * channel.law.at_slope(y, full, channel.slope)[0] * mp.sqrt(channel.slope)
                k = channel.law.at_discharge(y, full, channel.q)
                answer["full_friction_slope"] = (channel.q / k) ** 2 if k > 0 else None
                answer["surcharged"] = surcharged
            if channel.bank is not None:
                if surcharged:
                    answer["freeboard"], answer["fill"] = ZERO, ONE
                elif normal:
                    answer["freeboard"], answer["fill"] = channel.bank - normal[0], normal[0] / channel.bank
                else:
                    answer["freeboard"] = answer["fill"] = None

    # A depth: near empty, near the crown, full, near critical, at or next to a break, anywhere.
    x = rng.random()
    limit = sec.height
    if smooth_benches and x < 0.7:
        y = nice(section["bench_height"] * (1 + 10 ** rng.uniform(-3, -0.7)), rng)
    elif x < 0.1:
        y = gauge * 1e-9
    elif x < 0.2 and limit is not None:
        y = float(limit * (1 - mpf(10) ** -9))
    elif x < 0.25 and limit is not None:
        y = float(limit)
    elif x < 0.45 and critical:
        y = float(rng.choice(critical) * (1 + rng.choice([-1, 1]) * mpf(10) ** rng.uniform(-7, -3)))
    elif x < 0.48 and critical:
        y = float(rng.choice(critical))
    elif x < 0.5 and normal:
        y = float(rng.choice(normal))
    elif x < 0.57 and normal:
        y = float(rng.choice(normal) * (1 + rng.choice([-1, 1]) * mpf(10) ** rng.uniform(-5, -1)))
    elif x < 0.67 and inner:
        y = float(rng.choice(inner) * (1 + rng.choice([-1, 0, 1]) * mpf(10) ** rng.choice([-9, -3])))
    elif critical and x < 0.9:
        y = nice(float(rng.choice(critical)) * 10 ** rng.uniform(-0.6, 0.6), rng)
    else:
        y = nice(gauge * rng.uniform(0.01, 1) * (rng.choice([1, 1, 3]) if open_end else 1), rng)
    if not y > 0 or limit is not None and mpf(y) > limit:
        raise Skip("depth above the section")
    case["depth"] = y
    y = mpf(y)
    if any(y != b and abs(y - b) < mpf(10) ** -11 * y for b in channel.ends[1:-1]):
        raise Skip("depth within rounding of a break")
    state, regime = channel.state(y, with_discharge)
    answer["state"] = [state.get(member) for member in STATE]
    if with_discharge:
        answer["regime"] = regime
        if regime != "full":
            try:
                answer["alternate_depth"] = channel.conjugate(y, energy_branches, channel.energy, channel.energy_rate)
            except Skip:
                pass
            try:
                answer["sequent_depth"] = channel.conjugate(y, channel.branches(channel.force_rate, False), channel.force, channel.force_rate)
            except Skip:
                pass
        if channel.law:
            answer["curve"] = channel.curve(y, state, regime, answer["slope_class"], normal)
    case.update(answer)
    return case


def text(x):
    if isinstance(x, list):
        return [text(v) for v in x]
    return mp.nstr(x, 25, strip_zeros=True, min_fixed=-3, max_fixed=6) if isinstance(x, mpf) else x


def make(job):
    kind, index = job
    rng = random.Random(f"{SEED}{kind} {index}")
    for _ in range(200):
        try:
            case = draw(kind, rng, kind == "two_stage" and index >= 200)
        except Skip:
            continue
        inputs = ("section", "law", "kind")
        return json.dumps({k: v if k in inputs else text(v) for k, v in case.items()}, separators=(",", ":"))
    raise RuntimeError(f"no case for {job}")


def check():
    """Holds geometry against quadrature and every rate against a difference."""
    checked = 0
    for kind in KINDS:
        for index in range(12):
            rng = random.Random(f"check {kind} {index}")
            try:
                section = draw_section(kind, rng)
            except Skip:
                continue
            sec, segments, _, bed = build(kind, section)
            gauge = gauge_of(kind, section, sec)
            try:
                law = build_law(draw_law(kind, section, rng, gauge), segments, bed, mpf("9.81"))
            except Skip:
                law = None
            channel = Channel({"kind": kind, "section": section, "gravity": 9.81, "bed_slope": 0.01})
            channel.law = law
            channel.set_discharge(1.0)
            ends = sorted({b for b in list(sec.breaks) + (law.breaks if law else [])})
            for _ in range(2):
                y = mpf(gauge) * rng.uniform(0.01, 0.99)
                if any(abs(y - e) < mpf(10) ** -3 * y for e in ends):
                    continue
                g = sec.at(y)
                checked += 1
                if isinstance(sec, Straight):
                    for p, q in zip(g, sec.clip(y)):
                        assert abs(p - q) < mpf(10) ** -50 * (1 + abs(q)), (kind, section, y)
                h = y * mpf(10) ** -22
                up, down = sec.at(y + h), sec.at(y - h)
                for rate, i in ((g[2], 0), (g[4], 1), (g[5], 2), (g[0], 3)):
                    d = (up[i] - down[i]) / (2 * h)
                    assert abs(d - rate) < mpf(10) ** -35 * (1 + abs(rate)), (kind, section, y, i)
                marks = [ZERO] + [e for e in sec.breaks if e < y] + [y]
                with mp.workdps(30):
                    # Perimeter and area by quadrature of the outline's width, in a variable that is smooth at the bottom.
                    area = perimeter = ZERO
                    if index < 2 and not isinstance(sec, (Straight, Table)):
                        for lo, hi in zip(marks, marks[1:]):
                            area += mp.quad(lambda u: sec.at(lo + u * u)[2] * 2 * u, [0, mp.sqrt(hi - lo)], method="gauss-legendre")
                            perimeter += mp.quad(lambda u: 4 * u * mp.sqrt(1 + (sec.at(lo + u * u)[5] / 2) ** 2), [0, mp.sqrt(hi - lo)], method="gauss-legendre")
                        assert abs(area - g[0]) < mpf(10) ** -12 * area, (kind, section, y, area, g[0])
                        assert abs(perimeter - g[1]) < mpf(10) ** -9 * perimeter, (kind, section, y, perimeter, g[1])
                if law:
                    for f, rate in ((channel.energy, channel.energy_rate), (channel.force, channel.force_rate),
                                    (lambda y: mp.log(channel.conveyance(y)), channel.conveyance_rate)):
                        if channel.conveyance(y) == 0:
                            continue
                        d = (f(y + h) - f(y - h)) / (2 * h)
                        assert abs(d - rate(y)) < mpf(10) ** -25 * (1 + abs(d)), (kind, section, y, d, rate(y))
    for phi, m in ((mpf("0.7"), mpf("0.3")), (mpf("2.9"), mpf("0.97")), (mpf("1.5707"), mpf("0.5"))):
        assert abs(second_kind(phi, m) - mp.ellipe(phi, m)) < mpf(10) ** -60
    print(checked, "depths checked", file=sys.stderr)


def main():
    if "--check" in sys.argv:
        check()
        return
    only = [a for a in sys.argv[1:] if a in KINDS] or KINDS
    global SEED
    SEED = "".join(a + " " for a in sys.argv[1:] if a not in KINDS)
    jobs = [(kind, i) for kind in KINDS if kind in only for i in range(COUNT.get(kind, 120))]
    print(json.dumps({"about": "References for states and characteristic depths, made by flow.py: inputs are float64 numbers in SI units, "
                               "answers computed with mpmath at 70 digits and written to 25; null is absent.", "state": STATE}, separators=(",", ":")))
    with multiprocessing.Pool(2) as pool:
        for line in pool.imap(make, jobs, chunksize=2):
            print(line)


if __name__ == "__main__":
    main()
