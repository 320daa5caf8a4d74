#!/usr/bin/python3
"""Writes section.json beside it: the geometry of every kind of cross-section to 40 digits.

Usage: python3 section.py > section.json        (needs mpmath; takes about four minutes)

Sizes and depths are float64 numbers, taken exactly as they are. Values come by routes that share no closed form with the
program: curved outlines are integrated numerically (tanh-sinh quadrature with 100 digits, of the width for the area, of
(depth - level) * width for the first moment, of the arc element for the perimeter, rates by numeric differentiation of the
width and from the arc element); straight outlines are clipped at the water level segment by segment and the
depth of water over each segment is integrated over its run.
"""

import json
import random
import sys

from mpmath import mp, mpf, nstr, quad, sqrt, diff

mp.dps = 100
random.seed(20260817)


class Curved:
    """A section symmetrical about the vertical, given piecewise by its half width and the slope of the half width with level."""

    def __init__(self, pieces):
        self.pieces = pieces  # (from, to, half width, slope of half width), levels rising
        self.cache = {}

    def over(self, name, piece, lo, hi, f):
        key = (name, piece, lo, hi)
        if key not in self.cache:
            self.cache[key] = quad(f, [lo, (lo + hi) / 2, hi])
        return self.cache[key]

    def at(self, depth):
        area = perimeter = first = mpf(0)
        for i, (lo, hi, half, slope) in enumerate(self.pieces):
            if depth <= lo:
                break
            top = min(hi, depth)
            a = self.over("area", i, lo, top, lambda y: 2 * half(y))
            area += a
            first += self.over("first", i, lo, top, lambda y: 2 * half(y) * y)
            perimeter += self.over("perimeter", i, lo, top, lambda y: 2 * sqrt(1 + slope(y) ** 2))
            last = half, slope
        half, slope = last
        # One point of the central difference must not lie beyond the piece.
        step = min(depth, max(hi - depth, mpf(10) ** -60) if hi != mp.inf else depth) * mpf(10) ** -25
        width_rate = (half(depth + step) - half(depth - step)) / step
        return dict(
            area=area,
            wetted_perimeter=perimeter,
            top_width=2 * half(depth),
            moment=depth * area - first,
            perimeter_rate=2 * sqrt(1 + slope(depth) ** 2),
            top_width_rate=width_rate,
        )


def circle_piece(lo, hi, centre, radius, inset=mpf(0)):
    # Nodes of the quadrature lie so near the ends that the product can round to zero there; they weigh nothing.
    least = radius ** 2 * mpf(10) ** -98

    def root(y):
        return sqrt(max((radius - (y - centre)) * (radius + (y - centre)), least))

    return (lo, hi, lambda y: root(y) - inset, lambda y: -(y - centre) / root(y))


def upside_down(pieces, height):
    return [
        (height - hi, height - lo, (lambda h: lambda y: h(height - y))(half), (lambda s: lambda y: -s(height - y))(slope))
        for lo, hi, half, slope in reversed(pieces)
    ]


def egg_pieces(height):
    r = height / 3
    # The side's centre and the invert's: their line meets both arcs where they touch.
    cx, cy, iy = -2 * r, 2 * r, r / 2
    distance = sqrt(cx ** 2 + (cy - iy) ** 2)
    touch = cy + (iy - cy) / distance * 3 * r
    return [
        circle_piece(mpf(0), touch, r / 2, r / 2),
        circle_piece(touch, 2 * r, 2 * r, 3 * r, 2 * r),
        circle_piece(2 * r, height, 2 * r, r),
    ]


def horseshoe_pieces(height):
    r = height / 2
    meet = mp.findroot(lambda y: sqrt(4 * r * r - (y - 2 * r) ** 2) - (sqrt(4 * r * r - (y - r) ** 2) - r), (r * mpf("0.1"), r * mpf("0.3")), solver="anderson")
    return [
        circle_piece(mpf(0), meet, 2 * r, 2 * r),
        circle_piece(meet, r, r, 2 * r, r),
        circle_piece(r, height, r, r),
    ]


def ellipse_pieces(width, height):
    a, b = width / 2, height / 2
    _, _, half, slope = circle_piece(mpf(0), height, b, b)
    # In two pieces, since the arc element of a flat ellipse has a sharp bend at its widest level.
    return [(lo, hi, lambda y: a / b * half(y), lambda y: a / b * slope(y)) for lo, hi in ((mpf(0), b), (b, height))]


class Straight:
    """Points from left to right; beyond an end the wall goes straight up and adds nothing, or a side of given slope goes on.
    A leaning roof is no part of it."""

    def __init__(self, points, left=None, right=None, datum=None):
        self.points = [(mpf(x), mpf(z)) for x, z in points]
        self.left, self.right = left, right
        self.datum = min(z for _, z in self.points) if datum is None else datum

    def at(self, depth):
        water = self.datum + depth
        points = list(self.points)
        for side, place in ((self.left, 0), (self.right, -1)):
            if side is None:
                continue
            x, z = points[place]
            up = max(water - z, mpf(0)) + 1
            end = (x + (-1 if place == 0 else 1) * side * up, z + up)
            if place == 0:
                points.insert(0, end)
            else:
                points.append(end)
        area = perimeter = width = moment = perimeter_rate = width_rate = mpf(0)
        for (x1, z1), (x2, z2) in zip(points, points[1:]):
            if z1 == z2:
                if z1 < water:
                    run = x2 - x1
                    area += run * (water - z1)
                    moment += run * (water - z1) ** 2 / 2
                    perimeter += run
                    width += run
                continue
            low, high = min(z1, z2), max(z1, z2)
            if low >= water:
                continue
            rise = min(high, water) - low
            run = (x2 - x1) * rise / (high - low)
            d1, d2 = water - low, water - low - rise  # depths over the two ends of the wetted part
            area += run * (d1 + d2) / 2
            moment += run * (d1 * d1 + d1 * d2 + d2 * d2) / 6
            perimeter += sqrt(run ** 2 + rise ** 2)
            width += run
            if high >= water:
                width_rate += (x2 - x1) / (high - low)
                perimeter_rate += sqrt((x2 - x1) ** 2 + (high - low) ** 2) / (high - low)
        return dict(area=area, wetted_perimeter=perimeter, top_width=width, moment=moment, perimeter_rate=perimeter_rate, top_width_rate=width_rate)


def zone_of(straight, lo, hi):
    """The points of a line between two offsets. A wall at an offset goes to the side from which water wets it."""
    points, out = straight.points, []

    def level(x):  # inside a sloping stretch
        for (x1, z1), (x2, z2) in zip(points, points[1:]):
            if x1 < x < x2:
                return z1 + (z2 - z1) * (x - x1) / (x2 - x1)
        return None

    if lo is not None and all(x != lo for x, _ in points):
        out.append((lo, level(lo)))
    for i, (x, z) in enumerate(points):
        if (lo is None or x > lo) and (hi is None or x < hi):
            out.append((x, z))
        elif x in (lo, hi):
            run = [q for p, q in points if p == x]
            falls = run[0] > run[-1]
            if len(run) == 1 or (x == lo) == falls:
                out.append((x, z))
            elif x == lo and z == run[-1] and (not out or out[-1] != (x, z)):
                out.append((x, z))
            elif x == hi and z == run[0] and (not out or out[-1] != (x, z)):
                out.append((x, z))
    if hi is not None and all(x != hi for x, _ in points):
        out.append((hi, level(hi)))
    return Straight(out, None if lo is not None else straight.left, None if hi is not None else straight.right, straight.datum)


class Box:
    def __init__(self, width, height, haunch):
        self.w, self.h, self.f = width, height, haunch

    def at(self, depth):
        shoulder = self.h - self.f

        def width(y):
            return self.w if y <= shoulder else self.w - 2 * (y - shoulder)

        knots = [mpf(0)] + ([shoulder] if 0 < shoulder < depth else []) + [depth]
        leaning = depth > shoulder
        return dict(
            area=quad(width, knots),
            wetted_perimeter=self.w + 2 * min(depth, shoulder) + (2 * sqrt(2) * (depth - shoulder) if leaning else 0),
            top_width=width(depth),
            moment=quad(lambda y: (depth - y) * width(y), knots),
            perimeter_rate=2 * sqrt(mpf(2)) if leaning else mpf(2),
            top_width_rate=mpf(-2) if leaning else mpf(0),
        )


class Table:
    def __init__(self, rows):
        self.rows = [tuple(map(mpf, r)) for r in rows]

    def area(self, y):
        d, a, _, t = self.rows[0]
        if y <= d:
            return a * (y / d) ** (t * d / a)
        for (d1, a1, _, t1), (d2, a2, _, t2) in zip(self.rows, self.rows[1:]):
            if y <= d2:
                h = d2 - d1
                s = (y - d1) / h
                return a1 * (1 + 2 * s) * (1 - s) ** 2 + a2 * s * s * (3 - 2 * s) + h * t1 * s * (1 - s) ** 2 - h * t2 * s * s * (1 - s)

    def perimeter(self, y):
        d, a, p, t = self.rows[0]
        if y <= d:
            return p * (y / d) ** (t * d / a - 1)
        for (d1, _, p1, _), (d2, _, p2, _) in zip(self.rows, self.rows[1:]):
            if y <= d2:
                return p1 + (p2 - p1) * (y - d1) / (d2 - d1)

    def at(self, depth):
        knots = [mpf(0)] + [r[0] for r in self.rows if r[0] < depth] + [depth]
        step = depth * mpf(10) ** -30
        a0, a1, a2 = self.area(depth - 2 * step), self.area(depth - step), self.area(depth)
        am, ap = self.area(depth - step), self.area(depth + step)
        return dict(
            area=self.area(depth),
            wetted_perimeter=self.perimeter(depth),
            top_width=(ap - am) / (2 * step),
            moment=quad(self.area, knots),
            perimeter_rate=(self.perimeter(depth + step) - self.perimeter(depth - step)) / (2 * step),
            top_width_rate=(ap - 2 * a2 + am) / step ** 2,
        )


def curved(kind, members):
    m = {k: mpf(v) if isinstance(v, float) else v for k, v in members.items()}
    if kind == "circular":
        return Curved([circle_piece(mpf(0), m["diameter"], m["diameter"] / 2, m["diameter"] / 2)])
    if kind == "elliptical":
        return Curved(ellipse_pieces(m["width"], m["height"]))
    if kind == "egg":
        p = egg_pieces(m["height"])
        return Curved(upside_down(p, m["height"]) if m["inverted"] else p)
    if kind == "horseshoe":
        return Curved(horseshoe_pieces(m["height"]))
    if kind == "u_shaped":
        r = m["width"] / 2
        return Curved([circle_piece(mpf(0), r, r, r), (r, mp.inf, lambda y: r, lambda y: mpf(0))])
    if kind == "parabolic":
        w, h = m["top_width"], m["height"]
        return Curved([(mpf(0), mp.inf, lambda y: w / 2 * sqrt(y / h), lambda y: w / 4 / sqrt(y * h))])


def straight(kind, members):
    m = {k: mpf(v) if isinstance(v, float) else v for k, v in members.items()}
    if kind == "rectangular":
        b = m["bottom_width"]
        return Straight([(-b / 2, 0), (b / 2, 0)], mpf(0), mpf(0))
    if kind == "trapezoidal":
        b = m["bottom_width"]
        return Straight([(-b / 2, 0), (b / 2, 0)], m["left_side_slope"], m["right_side_slope"])
    if kind == "triangular":
        return Straight([(0, 0)], m["left_side_slope"], m["right_side_slope"])
    if kind == "gutter":
        points = [(mpf(0), mpf(0))]
        if "gutter_width" in m:
            points.append((m["gutter_width"], m["gutter_width"] * m["gutter_slope"]))
        return Straight(points, mpf(0), 1 / m["cross_slope"])
    if kind == "two_stage":
        b, h = m["bottom_width"] / 2, m["bench_height"]
        zl, zr = m["side_slope"] * h, m["side_slope"] * h
        l, r = m["left_bench_width"], m["right_bench_width"]
        points = [(-b - zl - l, h), (-b - zl, h), (-b, 0), (b, 0), (b + zr, h), (b + zr + r, h)]
        return Straight(points, m["upper_side_slope"], m["upper_side_slope"])
    if kind == "surveyed":
        return Straight(members["points"])


def build(section):
    kind = section["kind"]
    if kind == "box":
        return Box(mpf(section["width"]), mpf(section["height"]), mpf(section.get("haunch", 0.0)))
    if kind == "tabulated":
        return Table(section["rows"])
    return curved(kind, section) or straight(kind, section)


def state(model, depth, digits=40):
    values = model.at(mpf(depth))
    return dict(depth=depth, **{k: nstr(v, digits, min_fixed=0, max_fixed=0) for k, v in values.items()})


SMALL = [1e-12, 1e-9, 3.7e-7, 1e-5, 1e-3]


def closed_depths(height):
    shares = SMALL + [0.011, 0.07, 0.19, 0.25, 0.31, 0.4, 0.5, 0.55, 0.69, 0.8, 0.91, 0.938, 0.99]
    depths = [s * height for s in shares] + [height * (1 - s) for s in (1e-3, 1e-5, 3.7e-7, 1e-9)]
    depths += [random.uniform(0, height) for _ in range(8)]
    return sorted(set(depths))


def open_depths(scale):
    depths = [s * scale for s in SMALL + [0.01, 0.1, 0.3, 0.5, 0.77, 1.3, 2.0, 7.1, 100.0]]
    depths += [random.uniform(0, 2 * scale) for _ in range(6)]
    return sorted(set(depths))


def cases():
    for s in ({"bottom_width": 3.0}, {"bottom_width": 0.0123}):
        yield dict(kind="rectangular", **s), open_depths(1.7)
    for b, l, r in ((2.5, 1.5, 1.5), (0.3, 0.0, 2.25), (1e-6, 100.0, 0.3)):
        yield dict(kind="trapezoidal", bottom_width=b, left_side_slope=l, right_side_slope=r), open_depths(0.9)
    for l, r in ((1.0, 1.0), (0.0, 3.3), (1e-4, 2e-5)):
        yield dict(kind="triangular", left_side_slope=l, right_side_slope=r), open_depths(1.1)
    for w, h in ((4.0, 1.2), (0.01, 3.0), (900.0, 0.4)):
        yield dict(kind="parabolic", top_width=w, height=h), open_depths(h)
    for w in (1.0, 0.37):
        yield dict(kind="u_shaped", width=w), open_depths(w)
    for d in (1.0, 0.3, 2.7e-3, 7.3):
        yield dict(kind="circular", diameter=d), closed_depths(d)
    for w, h in ((2.0, 1.0), (0.9, 1.4), (1.0, 1.0000001), (50.0, 0.2), (0.05, 3.0), (1e6, 1.0), (2e-4, 40.0)):
        yield dict(kind="elliptical", width=w, height=h), closed_depths(h)
    for h, i in ((1.5, False), (0.9, True), (3.1, True), (0.42, False)):
        near = [h / 15 * (1 - 1e-7), h / 15 * (1 + 1e-7), h * (2 / 3 + 1e-7), h * (14 / 15 + 1e-7), h * (1 / 3 + 1e-7)]
        yield dict(kind="egg", height=h, inverted=i), sorted(closed_depths(h) + near)
    for h in (2.0, 3.3):
        yield dict(kind="horseshoe", height=h), sorted(closed_depths(h) + [h * 0.0885623, h * 0.0885621, h * 0.5000001])
    for w, h, f in ((2.0, 1.5, None), (1.8, 1.2, 0.2), (1.0, 0.7, 0.5), (3.0, 1.0, 1.0), (2.0, 1.5, 1.0)):
        s = dict(kind="box", width=w, height=h)
        if f is not None:
            s["haunch"] = f
        yield s, closed_depths(h)
    yield dict(kind="gutter", cross_slope=0.02, curb_height=0.15), open_depths(0.15)
    yield dict(kind="gutter", cross_slope=0.025, curb_height=0.12, gutter_width=0.6, gutter_slope=0.08), open_depths(0.12)
    yield dict(kind="gutter", cross_slope=0.05, curb_height=0.2, gutter_width=0.45, gutter_slope=0.03), open_depths(0.05)
    for b, z, h, l, r, u in ((3.0, 1.5, 0.8, 4.0, 4.0, 2.0), (1.1, 0.0, 0.35, 0.0, 25.0, 0.0), (0.4, 2.2, 1.9, 0.25, 0.0, 1.3)):
        s = dict(kind="two_stage", bottom_width=b, side_slope=z, bench_height=h, left_bench_width=l, right_bench_width=r, upper_side_slope=u)
        yield s, sorted(open_depths(h) + [h * (1 - 1e-9), h * (1 + 1e-9)])
    yield dict(kind="surveyed", points=[[0.0, 103.2], [2.5, 102.1], [4.0, 100.4], [5.1, 100.4], [7.3, 102.3], [11.0, 102.35], [12.6, 104.0]]), open_depths(2.0)
    # several troughs, walls, level benches, far above the datum
    yield dict(kind="surveyed", points=[[-20.0, 1234.5], [-20.0, 1231.25], [-15.0, 1231.25], [-12.3, 1230.0], [-9.0, 1232.1], [-3.0, 1229.3], [-1.0, 1229.9],
                                        [0.0, 1229.1], [0.0, 1233.0], [4.0, 1233.0], [4.0, 1230.7], [8.8, 1230.9], [9.0, 1233.8]]), open_depths(2.2)
    # ends below the highest point, a side that is nearly level, a slit
    yield dict(kind="surveyed", points=[[0.0, 1.0], [1.0, 0.0], [1.001, -0.5], [1.002, 0.0], [2.0, 2.0], [50.0, 2.0000000000000004], [51.0, 1.2], [52.0, 1.9]]), open_depths(1.3)
    # levels and offsets that differ by a millionth of a millimetre
    yield dict(kind="surveyed", points=[[1e6, 812.000000001], [1000000.5, 812.0], [1000001.0, 812.000000002], [1000001.5, 812.0], [1000001.5000000001, 812.5],
                                        [1000003.0, 812.5000000001], [1000004.0, 813.0]]), open_depths(0.7)
    random_points = []
    x = -30.0
    for i in range(60):
        x += random.choice([0.0, random.uniform(0, 2)]) if i % 3 == 1 else random.uniform(0, 2)
        random_points.append([x, 55 + random.uniform(-2, 2) + abs(i - 30) * 0.1])
    for i in range(2, 60):  # no wall that turns
        a, b, c = random_points[i - 2 : i + 1]
        if a[0] == b[0] == c[0] and (b[1] - a[1]) * (c[1] - b[1]) < 0:
            c[0] += 0.5
            for p in random_points[i + 1 :]:
                p[0] += 0.5
    yield dict(kind="surveyed", points=random_points), open_depths(2.5)
    yield dict(kind="tabulated", rows=[[0.4, 0.9, 3.3, 3.1], [1.0, 3.1, 5.0, 4.4], [1.7, 6.9, 7.1, 6.8], [2.2, 10.8, 8.9, 8.4]]), [2.2 * s for s in SMALL + [0.05, 0.1, 0.18, 0.2, 0.4, 0.5, 0.77, 0.78, 0.9, 0.999]]
    # a pipe: narrowing
    yield dict(kind="tabulated", rows=[[0.3, 0.2, 1.2, 0.92], [0.5, 0.39, 1.57, 1.0], [0.8, 0.67, 2.21, 0.8], [0.95, 0.77, 2.7, 0.44]]), [0.95 * s for s in SMALL + [0.05, 0.3, 0.4, 0.6, 0.8, 0.85, 0.9, 0.99, 0.9999]]


def parted():
    section = dict(kind="surveyed", points=[[-20.0, 1234.5], [-20.0, 1231.25], [-15.0, 1231.25], [-12.3, 1230.0], [-9.0, 1232.1], [-3.0, 1229.3], [-1.0, 1229.9],
                                            [0.0, 1229.1], [0.0, 1233.0], [4.0, 1233.0], [4.0, 1230.7], [8.8, 1230.9], [9.0, 1233.8]])
    yield section, [-13.1, -4.7, 0.0, 4.0, 8.9], [0.05, 0.4, 0.9, 1.3, 2.14, 2.16, 2.9, 3.5, 3.95, 4.6, 5.5, 9.0]
    section = dict(kind="two_stage", bottom_width=3.0, side_slope=1.5, bench_height=0.8, left_bench_width=4.0, right_bench_width=2.0, upper_side_slope=2.0)
    yield section, [-9.3, -2.7, 1.3, 2.9], [1e-9, 0.2, 0.79, 0.81, 1.0, 1.6, 2.2, 5.0]
    section = dict(kind="two_stage", bottom_width=3.0, side_slope=0.0, bench_height=0.8, left_bench_width=4.0, right_bench_width=2.0, upper_side_slope=0.0)
    yield section, [-1.5, 1.5], [1e-9, 0.2, 0.79, 0.81, 1.0, 1.6, 2.2, 5.0]


def extended(model, far=mpf(50)):
    """The line with its sides drawn out, so that it can be parted there."""
    points = list(model.points)
    for side, place in ((model.left, 0), (model.right, -1)):
        if side is not None:
            x, z = points[place]
            end = (x + (-1 if place == 0 else 1) * side * far, z + far)
            points.insert(0, end) if place == 0 else points.append(end)
    return Straight(points, model.left, model.right, model.datum)


def main():
    out = dict(source="section.py, mpmath " + __import__("mpmath").__version__, cases=[], parted=[])
    for section, depths in cases():
        model = build(section)
        out["cases"].append(dict(section=section, states=[state(model, d) for d in depths]))
        print(section["kind"], file=sys.stderr)
    for section, offsets, depths in parted():
        model = extended(build(section))
        bounds = [None] + [mpf(o) for o in offsets] + [None]
        parts = []
        for lo, hi in zip(bounds, bounds[1:]):
            zone = zone_of(model, lo, hi)
            parts.append([state(zone, d) for d in depths])
        out["parted"].append(dict(section=section, offsets=offsets, parts=parts))
    lines = ['{"source": %s, "cases": [' % json.dumps(out["source"])]
    lines.append(",\n".join(json.dumps(c) for c in out["cases"]))
    lines.append('], "parted": [')
    lines.append(",\n".join(json.dumps(c) for c in out["parted"]))
    lines.append("]}")
    print("\n".join(lines))


main()
