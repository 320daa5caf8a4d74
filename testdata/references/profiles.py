#!/usr/bin/env python3
"""Makes profiles.jsonl: runs of gradually varied flow with depths, jumps and controls, for the package profile.

Every run is put together by hand from the interface's documentation: which curves it has, where they start, which control governs. Draws that turn
out otherwise are rejected, so each line is one whose structure is known beforehand. The numbers come from profiles_flow.py. While they are made every
prismatic curve is integrated a second time by DOP853, and every other one a second time by another method; both must agree.

A line holds `discharge`, `reaches` or `stations`, `upstream`, `downstream`; `expect` with [chainage, depth, curve or null]; `jumps` with
[chainage, upstream depth, downstream depth]; `controls` with [chainage, depth, kind]. Numbers are float64 in SI units.

    /usr/bin/python3 profiles.py > profiles.jsonl        (needs numpy and scipy; a few minutes)
    /usr/bin/python3 profiles.py jump 7                  (only the runs with "jump" in their names, of another series)
"""
import json
import math
import random
import sys

import numpy as np
from scipy.integrate import solve_ivp

from profiles_flow import GRAVITY, Channel, Reject, Sweep, march, need, root

SERIES = ""  # another one draws other runs
WORST = {"quadrature against DOP853": 0.0, "DOP853 against another method": 0.0}


# ------------------------------------------------------------------------------------------------ drawing

def figures(x, n=4):
    return float(f"%.{n}g" % x)


KINDS = ["rectangular", "trapezoidal", "triangular", "parabolic", "circular", "egg", "u_shaped", "horseshoe", "box", "surveyed"]
CLOSED = {"circular", "egg", "horseshoe", "box"}


def draw_section(r, kind):
    size = figures(math.exp(r.uniform(math.log(0.5), math.log(15))), 3)
    if kind == "rectangular":
        return {"bottom_width": size}
    if kind == "trapezoidal":
        return {"bottom_width": size, "left_side_slope": figures(r.uniform(0.3, 3), 2), "right_side_slope": figures(r.uniform(0.3, 3), 2)}
    if kind == "triangular":
        return {"left_side_slope": figures(r.uniform(0.5, 4), 2), "right_side_slope": figures(r.uniform(0, 4), 2)}
    if kind == "parabolic":
        return {"top_width": size, "height": figures(size * r.uniform(0.15, 0.6), 3)}
    if kind == "circular":
        return {"diameter": figures(r.uniform(0.3, 3), 2)}
    if kind in ("egg", "horseshoe"):
        return {"height": figures(r.uniform(0.6, 3), 2)}
    if kind == "u_shaped":
        return {"width": figures(r.uniform(0.4, 3), 2)}
    if kind == "box":
        return {"width": figures(r.uniform(0.6, 4), 2), "height": figures(r.uniform(0.6, 3), 2)}
    if kind == "surveyed":
        w, d = figures(r.uniform(2, 8), 2), figures(r.uniform(3, 6), 2)
        return {"points": [[-w * 1.5, d * 2.5], [-w * 0.5, 0.25], [-0.1 * w, 0.0], [0.3 * w, 0.125], [w * 1.75, d * 2.5]]}
    raise ValueError(kind)


def draw_law(r, name=None):
    name = name or r.choice(["manning", "manning", "chezy", "sand_roughness", "strickler"])
    if name == "manning":
        return {"manning": figures(r.uniform(0.01, 0.04), 2)}
    if name == "strickler":
        return {"strickler": figures(r.uniform(25, 90), 2)}
    if name == "chezy":
        return {"chezy": figures(r.uniform(25, 80), 2)}
    return {"sand_roughness": figures(math.exp(r.uniform(math.log(1e-4), math.log(2e-2))), 2), "kinematic_viscosity": 1.14e-06}


def draw_channel(r, letter, kind=None, law=None, fill=None, extras=True):
    """A channel whose slope has a class, with a discharge."""
    kind = kind or r.choice(KINDS)
    section, law = draw_section(r, kind), draw_law(r, law)
    barrels = r.choice([1, 1, 1, 2, 3]) if extras else 1
    alpha, beta = r.choice([(1.0, 1.0), (1.0, 1.0), (1.1, 1.03)]) if extras else (1.0, 1.0)
    ch = Channel(kind, section, law, 0.0, barrels, alpha, beta)
    yc = fill * ch.sec.height if fill else (r.uniform(0.15, 0.6) * ch.sec.height if ch.sec.closed else math.exp(r.uniform(math.log(0.08), math.log(2))))
    a, _, t, _ = ch.sec.at(yc)
    total = figures(barrels * math.sqrt(GRAVITY * a ** 3 / t / alpha), 5)
    yc = ch.critical(total)
    sc = ch.friction(yc, total)
    if letter == "M":
        slope = figures(sc * r.uniform(0.05, 0.7))
    elif letter == "S":
        slope = figures(sc * r.uniform(1.5, 8))
    elif letter == "H":
        slope = 0.0
    elif letter == "A":
        slope = -figures(sc * r.uniform(0.1, 1))
    else:
        slope = sc
        for _ in range(60):
            c = Channel(kind, section, law, slope, barrels, alpha, beta)
            slope = c.friction(c.critical(total), total)
    need(slope < 0.4, "too steep")
    ch = Channel(kind, section, law, slope, barrels, alpha, beta)
    if letter in "MS":
        yn = ch.normal(total)
        need(ch.slope_class(total) == letter, "class")
        need(not ch.sec.closed or yn < 0.8 * ch.sec.height, "nearly full")
    elif letter == "C":
        need(ch.slope_class(total) == "C", "class")
    return ch, total


# ------------------------------------------------------------------------------------------------ writing

def reach(ch, length, **joint):
    d = {"kind": ch.kind, "section": ch.section, "law": ch.law, "bed_slope": ch.slope, "length": length}
    if ch.barrels != 1:
        d["barrels"] = ch.barrels
    if ch.alpha != 1:
        d["energy_coefficient"] = ch.alpha
    if ch.beta != 1:
        d["momentum_coefficient"] = ch.beta
    d.update({k: v for k, v in joint.items() if v})
    return d


class Case:
    def __init__(self, name, discharge, downstream, upstream=None, datum=0.0):
        self.d = {"name": name, "discharge": discharge, "upstream": upstream, "downstream": downstream, "datum": datum, "expect": [], "jumps": [], "controls": []}

    def reaches(self, *reaches):
        self.d["reaches"] = list(reaches)
        return self

    def along(self, function, points, curve=None):
        for x in points:
            y = function(x)
            self.d["expect"].append([x, y, curve(y) if curve else None])
        return self

    def jump(self, x, y1, y2):
        self.d["jumps"].append([x, y1, y2])
        return self

    def control(self, x, y, kind):
        self.d["controls"].append([x, y, kind])
        return self

    def done(self):
        self.d["expect"].sort(key=lambda e: e[0])
        need(self.d["expect"], "nothing to expect")
        return {k: v for k, v in self.d.items() if v is not None}


def spread(r, a, b, n=12, ends=True):
    """Chainages from a to b, a little uneven; with the ends or well inside."""
    if ends:
        inner = [a + (b - a) * (k + r.uniform(0.1, 0.9)) / (n - 2) for k in range(n - 2)]
        return [a] + inner + [b]
    return [a + (b - a) * (0.02 + 0.96 * (k + r.uniform(0.1, 0.9)) / n) for k in range(n)]


def held(sweep, points):
    """Integrates a free prismatic curve once more, by DOP853 over the chainage, from the first point well off critical depth."""
    ch, q, s = sweep.ch, sweep.q, sweep.s
    points = sorted(points, reverse=s < 0)
    start = None
    for p in points:
        y = sweep(p)
        if ch.sec.closed and y >= 0.97 * ch.sec.height:
            continue
        if abs(ch.D(y, q)) < 0.02 * ch.cos:
            continue
        if start is None:
            start = (p, y)
            continue
        z = march(lambda x, v: ch.N(v, q) / ch.D(v, q), start[0], start[1], [p])[0]
        off = abs(z - y) / y
        WORST["quadrature against DOP853"] = max(WORST["quadrature against DOP853"], off)
        # a curve that leaves normal depth or runs up to critical depth carries rounding forward
        if off > 2e-10:
            raise AssertionError(f"{ch.kind} {ch.section} {ch.law} {ch.slope} q={q}: {y} by quadrature, {z} by DOP853 at {p}")
        start = (p, y)


def force_gap(super_, sub, x):
    return super_.ch.M(super_(x), super_.q) - sub.ch.M(sub(x), sub.q)


def crossing(super_, sub, lo, hi):
    """The first place between lo and hi where the forces are equal; None where the supercritical one is greater throughout."""
    lo, hi = max(lo, sub.end), min(hi, super_.end)
    need(lo < hi, "no overlap")
    marks = [lo + (hi - lo) * k / 100 for k in range(100)] + [hi]
    gaps = [force_gap(super_, sub, x) for x in marks]
    if gaps[0] < 0:
        raise Reject("drowned")
    for a, b, ga, gb in zip(marks, marks[1:], gaps, gaps[1:]):
        if gb <= 0:
            return root(lambda x: force_gap(super_, sub, x), a, b)
    return None


def boundary_for(r, ch, y, total, datum, end):
    """One of the ways to say a depth."""
    how = r.choice(["depth", "level"])
    if how == "depth" or end == "upstream":
        return {"kind": "depth", "value": y}, y
    level = datum + y * ch.cos
    return {"kind": "level", "value": level}, (level - datum) / ch.cos


# ------------------------------------------------------------------------------------------------ single reaches

def single(r, name, letter, number, kind=None, law=None, length=None, start=None, slope_limit=None):
    ch, q = draw_channel(r, letter, kind, law)
    if slope_limit:
        need(slope_limit[0] <= ch.slope <= slope_limit[1], "slope")
    yc = ch.critical(q)
    yn = ch.normal(q) if letter in "MSC" else None
    h = ch.sec.height * 0.93
    datum = figures(r.uniform(-20, 300), 5)
    far = 1e9
    if number in ("1", "2") and letter != "S" or (letter, number) == ("S", "1"):  # subcritical, from downstream
        at_brink = start == "overfall"
        if at_brink:
            y0, boundary = yc, {"kind": r.choice(["free_overfall", "critical"])}
        else:
            if (letter, number) == ("M", "1"):
                y0 = yn * (1 + 1e-9) if start == "near" else yn * r.uniform(1.05, 2)
            elif (letter, number) == ("M", "2"):
                y0 = yn * (1 - 1e-9) if start == "near" else yc + (yn - yc) * r.uniform(0.05, 0.9)
            else:
                y0 = yc * r.uniform(1.1, 2.5)
            need(y0 < h, "too deep")
            boundary, y0 = boundary_for(r, ch, y0, q, datum, "downstream")
        probe = Sweep(ch, q, 0.0, y0, -1, -(length or far)) if letter in "HA" and length else None
        if length is None:
            if start == "near":
                length = figures(r.uniform(20, 2000), 3)
            elif letter == "M":
                y_end = yn + (y0 - yn) * 10 ** -r.uniform(0.5, 5)
                length = distance(ch, q, y0, y_end)
            elif letter in "SC":
                length = distance(ch, q, y0, yc + (y0 - yc) * r.uniform(0.1, 0.6))
            else:
                length = distance(ch, q, y0, min(y0 + yc * r.uniform(0.3, 2), h))
            length = figures(length, 5)
        sweep = Sweep(ch, q, length, y0, -1, 0.0)
        need(sweep.end == 0.0 and sweep(0.0) < h, "does not come through")
        if letter == "S" or letter == "C":
            need(sweep(0.0) > yc * 1.01, "near critical")
        upstream = None
        kindname = boundary["kind"]
        control = (length, y0, kindname)
    else:  # supercritical, from upstream
        if start == "pool":
            y0, upstream = yc, None
            need(letter == "S" and number == "2")
        else:
            if (letter, number) == ("S", "2"):
                y0 = yn * (1 + 1e-9) if start == "near" else yn + (yc - yn) * r.uniform(0.05, 0.9)
            elif (letter, number) == ("S", "3"):
                y0 = yn * (1 - 1e-9) if start == "near" else yn * r.uniform(0.3, 0.95)
            else:
                y0 = yc * r.uniform(0.25, 0.8)
            upstream = {"kind": "depth", "value": y0}
        if length is None:
            if start == "near":
                length = figures(r.uniform(20, 2000), 3)
            elif letter == "S":
                y_end = yn + (y0 - yn) * 10 ** -r.uniform(0.5, 5)
                length = distance(ch, q, y0, y_end)
            else:
                length = distance(ch, q, y0, y0 + (yc - y0) * r.uniform(0.2, 0.8))
            length = figures(length, 5)
        sweep = Sweep(ch, q, 0.0, y0, 1, length)
        need(sweep.end == length, "does not come through")
        boundary = {"kind": "free_overfall"}
        if letter != "S":
            sub = Sweep(ch, q, length, yc, -1, 0.0)
            need(crossing(sweep, sub, 0.0, length) is None, "jumps")
        control = (0.0, y0, "critical" if start == "pool" else "depth")
    points = spread(r, 0.0, length)
    case = Case(name, q, boundary, upstream, datum).reaches(reach(ch, length)).along(sweep, points, lambda y: ch.curve(y, q)).control(*control)
    names = {e[2] for e in case.d["expect"]} - {None, "uniform"}
    if start != "near":
        need(letter + number in names, f"names {names}")
    held(sweep, points)
    return case.done()


def distance(ch, q, ya, yb):
    """Length between two depths of one curve."""
    probe = Sweep.__new__(Sweep)
    probe.ch, probe.q = ch, q
    total, n = 0.0, 40
    for k in range(n):
        a, b = ya + (yb - ya) * k / n, ya + (yb - ya) * (k + 1) / n
        total += Sweep.gauss(probe, a, b, (None, lambda u: u, lambda u, y: 1.0))
    return abs(total)


def uniform(r, name, letter):
    ch, q = draw_channel(r, letter)
    yn = ch.normal(q)
    length = figures(r.uniform(10, 5000), 4)
    if letter == "M":
        case = Case(name, q, {"kind": "normal"}).control(length, yn, "normal")
    else:
        case = Case(name, q, {"kind": "free_overfall"}, {"kind": "normal"}).control(0.0, yn, "normal")
    return case.reaches(reach(ch, length)).along(lambda x: yn, spread(r, 0, length, 5), lambda y: "uniform").done()


def fixed(name, kind, section, law, slope, q, length, downstream, upstream, y0, s, r, tol=None):
    """A run of which everything is given by hand."""
    ch = Channel(kind, section, law, slope)
    if y0 == "critical":
        y0 = ch.critical(q)
    x0 = 0.0 if s > 0 else length
    sweep = Sweep(ch, q, x0, y0, s, length - x0)
    need(sweep.end == length - x0, "does not come through")
    if s > 0 and ch.slope_class(q) != "S":
        sub = Sweep(ch, q, length, ch.critical(q), -1, 0.0)
        need(crossing(sweep, sub, 0.0, length) is None, "jumps")
    points = spread(r, 0.0, length)
    case = Case(name, q, downstream, upstream).reaches(reach(ch, length)).along(sweep, points, lambda y: ch.curve(y, q)).control(
        x0, y0, downstream["kind"] if s < 0 else "critical")
    held(sweep, points)
    return case.done()


# ------------------------------------------------------------------------------------------------ boundaries

def structure(r, name, how):
    """A mild reach, or a steep one for S1, governed by a structure downstream."""
    letter = r.choice("MMH") if how != "gate_downstream" else r.choice("MMS")
    ch, q = draw_channel(r, letter, r.choice(["rectangular", "trapezoidal", "triangular", "parabolic", "surveyed"]), extras=how != "sharp_rehbock")
    yc = ch.critical(q)
    least = ch.E(yc, q)
    b = figures(r.uniform(0.5, 1.5) * ch.sec.at(yc)[2] * ch.barrels, 3)
    if how.startswith("broad"):
        cd = 0.0 if how.endswith("ideal") else figures(r.uniform(0.85, 1.0), 3)
        crest = figures(r.uniform(0.3, 2) * yc, 3)
        energy = crest + 1.5 * (q * q / (GRAVITY * ((cd or 1.0) * b) ** 2)) ** (1 / 3)
        need(energy > least * 1.02, "drowned")
        y0 = ch.subcritical(lambda y: ch.E(y, q) - energy, q)
        boundary = {"kind": "broad_crested", "crest_height": crest, "crest_width": b, "coefficient": cd}
    elif how.startswith("sharp"):
        cd = 0.0 if how.endswith("rehbock") else figures(r.uniform(0.58, 0.7), 3)
        crest = figures(r.uniform(0.6, 2) * yc, 3)
        over = lambda h: 2 / 3 * math.sqrt(2 * GRAVITY) * b * (cd * h ** 1.5 if cd else (0.602 + 0.083 * h / crest) * (h + 0.0012) ** 1.5)
        head = root(lambda h: over(h) - q, 1e-6, 100.0)
        y0 = (crest + head) / ch.cos
        need(y0 > yc * 1.02, "drowned")
        boundary = {"kind": "sharp_crested", "crest_height": crest, "crest_width": b, "coefficient": cd}
    elif how == "rating":
        y0 = yc * r.uniform(1.2, 2.5)
        q0, q1 = figures(q * r.uniform(0.4, 0.9), 4), figures(q * r.uniform(1.1, 1.6), 4)
        d0, d1 = figures(yc * r.uniform(1.1, 1.4), 4), figures(yc * r.uniform(1.8, 2.5), 4)
        y0 = d0 + (d1 - d0) * (q - q0) / (q1 - q0)
        boundary = {"kind": "rating", "curve": [[figures(d0 / 2, 3), q0 / 2], [d0, q0], [d1, q1], [2 * d1, 4 * q1]]}
    else:
        opening, cc = figures(yc * r.uniform(0.5, 1.3), 4), r.choice([0.61, 0.7])
        jet = opening * cc
        need(jet < 0.9 * yc, "does not govern")
        energy = ch.E(jet, q)
        y0 = ch.subcritical(lambda y: ch.E(y, q) - energy, q)
        boundary = {"kind": "gate", "opening": opening, "contraction": cc}
    if letter == "S":
        length = figures(distance(ch, q, y0, yc + (y0 - yc) * 0.5), 3)
    else:
        length = figures(r.uniform(5, 200) * y0, 3)
    sweep = Sweep(ch, q, length, y0, -1, 0.0)
    need(sweep.end == 0.0)
    points = spread(r, 0.0, length)
    held(sweep, points)
    return Case(name, q, boundary).reaches(reach(ch, length)).along(sweep, points, lambda y: ch.curve(y, q)).control(length, y0, boundary["kind"]).done()


# ------------------------------------------------------------------------------------------------ jumps in one reach

def with_jump(r, name, up, down, gate=False):
    letter = up[0]
    ch, q = draw_channel(r, letter, extras=False)
    yc = ch.critical(q)
    yn = ch.normal(q) if letter in "MS" else None
    h = ch.sec.height * 0.93
    upstream = None
    if up == "S2":
        y1 = yc if r.random() < 0.5 else yn + (yc - yn) * r.uniform(0.1, 0.9)
        upstream = None if y1 == yc else {"kind": "depth", "value": y1}
    elif up == "S3":
        y1 = yn * r.uniform(0.3, 0.9)
        upstream = {"kind": "depth", "value": y1}
    elif gate:
        opening, cc = figures(yc * r.uniform(0.4, 0.9), 4), 0.61
        y1 = opening * cc
        upstream = {"kind": "gate", "opening": opening, "contraction": cc}
    else:
        y1 = yc * r.uniform(0.2, 0.6)
        upstream = {"kind": "depth", "value": y1}
    if down == "M1":
        y2 = yn * r.uniform(1.02, 1.4)
    elif down == "M2":
        y2 = yc + (yn - yc) * r.uniform(0.3, 0.95)
    elif down == "brink":
        y2 = yc
    else:
        y2 = ch.subcritical(lambda y: ch.M(y, q) - ch.M(y1 if letter != "S" else yn, q) * r.uniform(1.05, 1.6), q) if letter == "S" else yc * r.uniform(1.05, 1.8)
    need(y2 < h, "too deep")
    if letter == "S":
        length = distance(ch, q, y2, yc * 1.05) * r.uniform(0.8, 2)
    else:
        length = distance(ch, q, y1, yc * 0.97) * r.uniform(0.5, 4)
    length = figures(length, 5)
    super_, sub = Sweep(ch, q, 0.0, y1, 1, length), Sweep(ch, q, length, y2, -1, 0.0)
    x = crossing(super_, sub, 0.0, length)
    need(x is not None and 0.02 * length < x < 0.98 * length, "no jump inside")
    ya, yb = super_(x), sub(x)
    need(yb > 1.05 * ya, "weak")
    gap = 0.01 * length
    before, after = spread(r, 0.0, x - gap, 7), spread(r, x + gap, length, 6)
    held(super_, before)
    held(sub, after)
    case = Case(name, q, {"kind": "free_overfall"} if down == "brink" else {"kind": "depth", "value": y2}, upstream)
    case.reaches(reach(ch, length)).along(super_, before, lambda y: ch.curve(y, q)).along(sub, after, lambda y: ch.curve(y, q)).jump(x, ya, yb)
    case.control(0.0, y1, upstream["kind"] if upstream else "critical").control(length, y2, "free_overfall" if down == "brink" else "depth")
    return case.done()


def drowned_gate(r, name):
    """A gate upstream whose jet is drowned: the flow is subcritical throughout."""
    ch, q = draw_channel(r, "M", extras=False)
    yc, yn = ch.critical(q), ch.normal(q)
    opening = figures(yc * r.uniform(0.9, 1.3), 4)
    jet = opening * 0.61
    need(jet < 0.95 * yc)
    y2 = yn * r.uniform(1.0, 1.5)
    need(y2 < 0.93 * ch.sec.height)
    length = figures(r.uniform(5, 30) * yn, 3)
    sub = Sweep(ch, q, length, y2, -1, 0.0)
    need(ch.M(sub(0.0), q) > 1.05 * ch.M(jet, q), "free")
    points = spread(r, 0.0, length, 6)
    return Case(name, q, {"kind": "depth", "value": y2}, {"kind": "gate", "opening": opening, "contraction": 0.61}).reaches(reach(ch, length)).along(
        sub, points, lambda y: ch.curve(y, q)).control(length, y2, "depth").done()


# ------------------------------------------------------------------------------------------------ joints

def join_up(upper, lower, q_upper, q_lower, y_lower, drop=0.0, loss=0.0, entry=0.0):
    """The subcritical depth at the downstream end of the upper reach, and which section governs: "sweep", "lower" or "upper"."""
    def asked(y):
        """The depth above for a depth below, or None where even critical depth above has more energy."""
        q = q_upper
        if q_lower != q_upper:  # the force below, without the inflow
            force = lower.M(y, q_lower)
            y = lower.subcritical(lambda v: lower.M(v, q_upper) - force, q_upper)
        below = lower.head(y, q)
        want = lower.E(y, q) + entry * below - drop
        f = lambda v: upper.E(v, q_upper) - loss * abs(upper.head(v, q_upper) - below) - want
        if f(upper.critical(q_upper)) >= 0:
            return None
        return upper.subcritical(f, q_upper)
    yc_lower, yc_upper = lower.critical(q_lower), upper.critical(q_upper)
    options = [(upper.E(yc_upper, q_upper), yc_upper, "upper")]
    for y, what in ((y_lower, "sweep"), (yc_lower, "lower")):
        if y is None:
            continue
        v = asked(y)
        if v is not None:
            options.append((upper.E(v, q_upper), v, what))
    options.sort()
    if len(options) > 1:
        need(options[-1][0] > options[-2][0] * (1 + 1e-9), "two govern")
    return options[-1][1], options[-1][2]


def join_down(upper, lower, q_upper, q_lower, y_upper, drop=0.0, loss=0.0, entry=0.0):
    """The supercritical depth at the upstream end of the lower reach."""
    above = upper.head(y_upper, q_upper)
    have = upper.E(y_upper, q_upper) + drop
    f = lambda v: lower.E(v, q_upper) + loss * abs(above - lower.head(v, q_upper)) + entry * lower.head(v, q_upper) - have
    need(f(lower.critical(q_upper)) < 0, "the energy does not suffice")
    y = lower.supercritical(f, q_upper)
    if q_lower != q_upper:
        force = lower.M(y, q_upper)
        need(lower.M(lower.critical(q_lower), q_lower) < force, "the force does not suffice")
        y = lower.supercritical(lambda v: force - lower.M(v, q_lower), q_lower)
    return y


def pair(r, letters, same_section=False, extras=False, kind=None):
    """Two channels of one discharge."""
    a, q = draw_channel(r, letters[0], kind, extras=extras)
    if same_section:
        yc = a.critical(q)
        sc = a.friction(yc, q)
        slope = {"M": figures(sc * r.uniform(0.1, 0.6)), "S": figures(sc * r.uniform(1.5, 6)), "H": 0.0, "A": -figures(sc * r.uniform(0.1, 0.5))}[letters[1]]
        b = Channel(a.kind, a.section, a.law, slope, a.barrels, a.alpha, a.beta)
        need(b.slope_class(q) == letters[1])
        if letters[1] in "MS":
            need(not b.sec.closed or b.normal(q) < 0.8 * b.sec.height)
        return a, b, q
    for _ in range(40):
        b, qb = draw_channel(r, letters[1], extras=extras)
        # the same discharge in the other channel
        try:
            yc = b.critical(q)
            if b.sec.closed and yc > 0.7 * b.sec.height:
                continue
            need(0.3 < yc / a.critical(q) < 3)
            if letters[1] in "MS":
                need(b.slope_class(q) == letters[1])
                need(not b.sec.closed or b.normal(q) < 0.8 * b.sec.height)
            return a, b, q
        except Reject:
            continue
    raise Reject("no partner")


def mild_steep(r, name, same):
    a, b, q = pair(r, "MS", same)
    yu, who = join_up(a, b, q, q, None)
    need(who == "upper", who)
    la, lb = figures(r.uniform(20, 400) * yu, 3), figures(r.uniform(20, 200) * yu, 3)
    sub = Sweep(a, q, la, yu, -1, 0.0)
    super_ = Sweep(b, q, la, join_down(a, b, q, q, yu), 1, la + lb)
    need(sub(0.0) < 0.93 * a.sec.height)
    pa, pb = spread(r, 0.0, la, 8)[:-1], spread(r, la, la + lb, 8)[1:]
    held(sub, pa)
    held(super_, pb)
    return Case(name, q, {"kind": "free_overfall"}).reaches(reach(a, la), reach(b, lb)).along(sub, pa, lambda y: a.curve(y, q)).along(
        super_, pb, lambda y: b.curve(y, q)).control(la, yu, "critical").done()


def mild_mild(r, name, loss=0.0, entry=0.0, drop=0.0, inflow=0.0, extras=True):
    """Subcritical through a joint."""
    a, b, q = pair(r, "MM", extras=extras)
    q2 = q
    if inflow:
        q2 = figures(q * (1 + inflow), 5)
        inflow = q2 - q
        q2 = q + inflow
        need(b.slope_class(q2) == "M" and (not b.sec.closed or b.normal(q2) < 0.75 * b.sec.height))
    yn = b.normal(q2)
    y2 = yn * r.uniform(0.95, 1.6)
    need(b.critical(q2) * 1.05 < y2 < 0.93 * b.sec.height)
    lb = figures(r.uniform(5, 300) * yn, 3)
    sub_b = Sweep(b, q2, lb, y2, -1, 0.0)
    drop = figures(drop * b.critical(q2), 3)
    yu, who = join_up(a, b, q, q2, sub_b(0.0), drop, loss, entry)
    need(who == "sweep" and a.critical(q) * 1.05 < yu < 0.93 * a.sec.height, who)
    la = figures(r.uniform(5, 300) * yu, 3)
    sub_a = Sweep(a, q, la, yu, -1, 0.0)
    need(sub_a.end == 0.0 and sub_a(0.0) < 0.93 * a.sec.height)
    pa, pb = spread(r, 0.0, la, 7)[:-1], spread(r, la, la + lb, 7)[1:]
    shifted = Sweep(b, q2, la + lb, y2, -1, la)
    held(sub_a, pa)
    held(shifted, pb)
    return Case(name, q, {"kind": "depth", "value": y2}).reaches(reach(a, la, drop=drop, loss=loss), reach(b, lb, entry=entry, inflow=inflow)).along(
        sub_a, pa, lambda y: a.curve(y, q)).along(shifted, pb, lambda y: b.curve(y, q2)).control(la + lb, y2, "depth").done()


def choke_entry(r, name, entry=0.0, loss=0.0):
    """A steep lower reach of less capacity: its least energy governs."""
    a, b, q = pair(r, "MS")
    yu, who = join_up(a, b, q, q, None, 0.0, loss, entry)
    need(who == "lower" and a.critical(q) * 1.02 < yu < 0.93 * a.sec.height, who)
    la, lb = figures(r.uniform(20, 300) * yu, 3), figures(r.uniform(20, 200) * yu, 3)
    sub = Sweep(a, q, la, yu, -1, 0.0)
    need(sub.end == 0.0 and sub(0.0) < 0.93 * a.sec.height)
    yc = b.critical(q)
    super_ = Sweep(b, q, la, yc, 1, la + lb)
    pa, pb = spread(r, 0.0, la, 8)[:-1], spread(r, la, la + lb, 8)[1:]
    held(sub, pa)
    held(super_, pb)
    return Case(name, q, {"kind": "free_overfall"}).reaches(reach(a, la, loss=loss), reach(b, lb, entry=entry)).along(sub, pa, lambda y: a.curve(y, q)).along(
        super_, pb, lambda y: b.curve(y, q)).control(la, yc, "critical").done()


def throat(r, name):
    """A short narrow reach between two wide mild ones: critical at its end, a jump or a drowned fall below it, the rise above."""
    law = draw_law(r)
    width = figures(r.uniform(3, 10), 2)
    slope = figures(10 ** r.uniform(-3.6, -2.7), 3)
    z = figures(r.uniform(0, 2), 2)
    kind = "trapezoidal"
    wide = Channel(kind, {"bottom_width": width, "left_side_slope": z, "right_side_slope": z}, law, slope)
    narrow = Channel("rectangular", {"bottom_width": figures(width * r.uniform(0.3, 0.6), 3)}, law, slope)
    q = figures(width * r.uniform(0.5, 3), 4)
    for c in (wide, narrow):
        need(c.slope_class(q) == "M")
    yn = wide.normal(q)
    y3 = yn * r.uniform(0.9, 1.1)
    l1, l2, l3 = figures(r.uniform(50, 300) * yn, 3), figures(r.uniform(2, 10) * yn, 3), figures(r.uniform(30, 200) * yn, 3)
    x1, x2, x3 = l1, l1 + l2, l1 + l2 + l3
    sub3 = Sweep(wide, q, x3, y3, -1, x2)
    need(y3 > 1.05 * wide.critical(q))
    y2, who = join_up(narrow, wide, q, q, sub3(x2))
    need(who == "upper", who)
    sub2 = Sweep(narrow, q, x2, y2, -1, x1)
    y1, who = join_up(wide, narrow, q, q, sub2(x1))
    need(who == "sweep" and y1 > 1.02 * wide.critical(q), who)
    sub1 = Sweep(wide, q, x1, y1, -1, 0.0)
    super3 = Sweep(wide, q, x2, join_down(narrow, wide, q, q, y2), 1, x3)
    case = Case(name, q, {"kind": "depth", "value": y3}).reaches(reach(wide, l1), reach(narrow, l2), reach(wide, l3)).control(x2, y2, "critical").control(x3, y3, "depth")
    f = lambda y: wide.curve(y, q)
    p1, p2 = spread(r, 0.0, x1, 6)[:-1], spread(r, x1, x2, 5)[1:-1]
    case.along(sub1, p1, f).along(sub2, p2, lambda y: narrow.curve(y, q))
    held(sub1, p1)
    try:
        x = crossing(super3, sub3, x2, x3)
    except Reject as reason:
        if str(reason) != "drowned":
            raise
        p3 = spread(r, x2, x3, 6)[1:]
        return case.along(sub3, p3, f).done()
    need(x is not None and x2 + 0.01 * l3 < x < x3 - 0.02 * l3)
    ya, yb = super3(x), sub3(x)
    need(yb > 1.05 * ya)
    gap = 0.3 * min(x - x2, x3 - x)
    p3, p4 = spread(r, x2, x - gap, 5)[1:], spread(r, x + gap, x3, 5)
    held(super3, p3)
    held(sub3, p4)
    return case.along(super3, p3, f).along(sub3, p4, f).jump(x, ya, yb).done()


def steep_mild(r, name, where, same=True):
    """S2 and a jump in the steep reach or below it."""
    a, b, q = pair(r, "SM", same)
    ya, yb = a.critical(q), b.critical(q)
    yn = b.normal(q)
    y2 = yn * r.uniform(0.9, 1.4) if where == "below" else yn * r.uniform(1.0, 2.5)
    need(1.05 * yb < y2 < 0.93 * b.sec.height)
    la, lb = figures(r.uniform(20, 200) * ya, 3), figures(r.uniform(20, 300) * yb, 3)
    xa, xb = la, la + lb
    super_a, sub_b = Sweep(a, q, 0.0, ya, 1, xa), Sweep(b, q, xb, y2, -1, xa)
    need(sub_b.end == xa and super_a.end == xa)
    y_in = join_down(a, b, q, q, super_a(xa))
    super_b = Sweep(b, q, xa, y_in, 1, xb)
    y_out, who = join_up(a, b, q, q, sub_b(xa))
    fa, fb = (lambda y: a.curve(y, q)), (lambda y: b.curve(y, q))
    case = Case(name, q, {"kind": "depth", "value": y2}).reaches(reach(a, la), reach(b, lb)).control(0.0, ya, "critical").control(xb, y2, "depth")
    below = b.M(y_in, q) > b.M(sub_b(xa), q)
    if where == "below":
        need(below)
        x = crossing(super_b, sub_b, xa, xb)
        need(x is not None and xa + 0.01 * lb < x < xb - 0.01 * lb)
        if who == "sweep":  # above the joint the supercritical stream must be the stronger everywhere
            sub_a = Sweep(a, q, xa, y_out, -1, 0.0)
            need(crossing(super_a, sub_a, 0.0, xa) is None)
        p0, y1, y2_ = spread(r, 0.0, xa, 6)[:-1], super_b(x), sub_b(x)
        gap = 0.3 * min(x - xa, xb - x)
        p1, p2 = spread(r, xa, x - gap, 5)[1:], spread(r, x + gap, xb, 5)
        case.along(super_a, p0, fa).along(super_b, p1, fb).along(sub_b, p2, fb)
        held(super_b, p1)
        held(sub_b, p2)
    else:
        need(not below and who == "sweep", who)
        sub_a = Sweep(a, q, xa, y_out, -1, 0.0)
        need(y_out < 0.93 * a.sec.height)
        x = crossing(super_a, sub_a, 0.0, xa)
        need(x is not None and 0.01 * la < x < 0.99 * la)
        y1, y2_ = super_a(x), sub_a(x)
        gap = 0.3 * min(x, xa - x)
        p0, p1, p2 = spread(r, 0.0, x - gap, 5), spread(r, x + gap, xa, 5)[:-1], spread(r, xa, xb, 5)[1:]
        case.along(super_a, p0, fa).along(sub_a, p1, fa).along(sub_b, p2, fb)
        held(super_a, p0)
        held(sub_a, p1)
    need(y2_ > 1.05 * y1)
    return case.jump(x, y1, y2_).done()


def drop_control(r, name, loss=0.0):
    """A drop between two mild reaches: critical at its lip, then a supercritical stretch and a jump."""
    a, b, q = pair(r, "MM", r.random() < 0.5)
    yn = b.normal(q)
    y2 = yn * r.uniform(0.8, 1.05)
    need(1.05 * b.critical(q) < y2 < 0.93 * b.sec.height)
    drop = figures(yn * r.uniform(1, 4), 3)
    la, lb = figures(r.uniform(20, 300) * a.critical(q), 3), figures(r.uniform(30, 300) * yn, 3)
    xa, xb = la, la + lb
    sub_b = Sweep(b, q, xb, y2, -1, xa)
    yu, who = join_up(a, b, q, q, sub_b(xa), drop, loss)
    need(who == "upper", who)
    sub_a = Sweep(a, q, xa, yu, -1, 0.0)
    need(sub_a(0.0) < 0.93 * a.sec.height)
    y_in = join_down(a, b, q, q, yu, drop, loss)
    super_b = Sweep(b, q, xa, y_in, 1, xb)
    x = crossing(super_b, sub_b, xa, xb)
    need(x is not None and xa + 0.01 * lb < x < xb - 0.01 * lb)
    y1, y2_ = super_b(x), sub_b(x)
    need(y2_ > 1.05 * y1)
    gap = 0.3 * min(x - xa, xb - x)
    p0, p1, p2 = spread(r, 0.0, xa, 6)[:-1], spread(r, xa, x - gap, 5)[1:], spread(r, x + gap, xb, 5)
    held(super_b, p1)
    held(sub_b, p2)
    f = lambda y: b.curve(y, q)
    return Case(name, q, {"kind": "depth", "value": y2}).reaches(reach(a, la, drop=drop, loss=loss), reach(b, lb)).along(sub_a, p0, lambda y: a.curve(y, q)).along(
        super_b, p1, f).along(sub_b, p2, f).jump(x, y1, y2_).control(xa, yu, "critical").control(xb, y2, "depth").done()


def steep_steep(r, name, loss=0.0, drop=0.0, inflow=0.0, entry=0.0):
    """Supercritical through a joint."""
    a, b, q = pair(r, "SS", extras=r.random() < 0.4)
    q2 = q
    if inflow:
        inflow = figures(q * inflow, 4)
        q2 = q + inflow
        need(b.slope_class(q2) == "S" and (not b.sec.closed or b.normal(q2) < 0.75 * b.sec.height))
    ya = a.critical(q)
    la, lb = figures(r.uniform(20, 200) * ya, 3), figures(r.uniform(20, 200) * ya, 3)
    super_a = Sweep(a, q, 0.0, ya, 1, la)
    drop = figures(drop * ya, 3)
    y_in = join_down(a, b, q, q2, super_a(la), drop, loss, entry)
    need(b.D(y_in, q2) < -0.05)
    super_b = Sweep(b, q2, la, y_in, 1, la + lb)
    need(super_b.end == la + lb)
    # no subcritical stream may stand at the joint: what the lower reach's least energy asks above must end before the pool, and be weaker
    yu, who = join_up(a, b, q, q2, None, drop, loss, entry)
    if who == "lower":
        sub_a = Sweep(a, q, la, yu, -1, 0.0)
        need(a.M(yu, q) < a.M(super_a(la), q) and crossing(super_a, sub_a, 0.0, la) is None, "it would jump")
    pa, pb = spread(r, 0.0, la, 7)[:-1], spread(r, la, la + lb, 7)[1:]
    held(super_a, pa)
    held(super_b, pb)
    return Case(name, q, {"kind": "free_overfall"}).reaches(reach(a, la, drop=drop, loss=loss), reach(b, lb, inflow=inflow, entry=entry)).along(
        super_a, pa, lambda y: a.curve(y, q)).along(super_b, pb, lambda y: b.curve(y, q2)).control(0.0, ya, "critical").done()


def inflow_chokes(r, name):
    """An inflow at the head of a steep reach: critical depth with it stands in for the sweep, and the force without it gives the depth above."""
    a, b, q = pair(r, "MS", True)
    inflow = figures(q * r.uniform(0.2, 1.5), 4)
    q2 = q + inflow
    need(b.slope_class(q2) == "S" and (not b.sec.closed or b.critical(q2) < 0.7 * b.sec.height))
    yu, who = join_up(a, b, q, q2, None)
    need(who == "lower" and a.critical(q) * 1.02 < yu < 0.93 * a.sec.height, who)
    la, lb = figures(r.uniform(20, 300) * yu, 3), figures(r.uniform(20, 200) * yu, 3)
    sub = Sweep(a, q, la, yu, -1, 0.0)
    need(sub.end == 0 and sub(0.0) < 0.93 * a.sec.height)
    yc = b.critical(q2)
    super_ = Sweep(b, q2, la, yc, 1, la + lb)
    pa, pb = spread(r, 0.0, la, 7)[:-1], spread(r, la, la + lb, 7)[1:]
    held(sub, pa)
    held(super_, pb)
    return Case(name, q, {"kind": "free_overfall"}).reaches(reach(a, la), reach(b, lb, inflow=inflow)).along(sub, pa, lambda y: a.curve(y, q)).along(
        super_, pb, lambda y: b.curve(y, q2)).control(la, yc, "critical").done()


# ------------------------------------------------------------------------------------------------ lateral inflow

class Lateral:
    """A reach with inflow along it: the ordinary differential equation of the documentation."""

    def __init__(self, ch, q0, lateral):
        self.ch, self.q0, self.lat = ch, q0, lateral

    def q(self, x):
        return self.q0 + self.lat * x

    def N(self, x, y):
        ch = self.ch
        q, l = self.q(x) / ch.barrels, self.lat / ch.barrels
        return ch.N(y, self.q(x)) - 2 * ch.beta * q * l / (GRAVITY * ch.geometry(y)[0] ** 2)

    def rate(self, x, y):
        return self.N(x, y) / self.ch.D(y, self.q(x))

    def off_critical(self, x, y, to):
        """From critical depth at x to another depth, over the depth: gives the chainage there."""
        r = solve_ivp(lambda v, t: [self.ch.D(v, self.q(t[0])) / self.N(t[0], v)], (y, to), [x], method="DOP853", rtol=1e-13, atol=1e-15)
        assert r.success
        return r.y[0][-1]


def depths_of(flow, x0, y0, points):
    """By DOP853, and once more by an implicit method."""
    got = march(flow.rate, x0, y0, points)
    again = march(flow.rate, x0, y0, points, rtol=1e-10, method="Radau")
    for p, y, z in zip(points, got, again):
        off = abs(y - z) / y
        WORST["DOP853 against another method"] = max(WORST["DOP853 against another method"], off)
        if off > 3e-8:
            raise AssertionError(f"{y} by DOP853, {z} by Radau at {p}")
    return got


def lateral(r, name, letter, way):
    ch, q2 = draw_channel(r, letter, r.choice(["rectangular", "trapezoidal", "triangular", "parabolic", "circular", "u_shaped"]))
    q0 = figures(q2 * r.uniform(0.2, 0.8), 4)
    yc = ch.critical(q2)
    length = figures(r.uniform(30, 300) * yc, 3)
    lat = figures((q2 - q0) / length, 4)
    flow = Lateral(ch, q0, lat)
    qe = q0 + lat * length
    yc = ch.critical(qe)
    need(ch.slope_class(qe) == letter)
    points = spread(r, 0.0, length, 11)
    if way == "sub":
        brink = r.random() < 0.4
        if brink:
            need(flow.N(length, yc) < 0)
            y0, to = yc, yc * 1.1
            x1 = flow.off_critical(length, yc, to)
            need(x1 > 0.9 * length)
            points = [p for p in points if p < x1 - 0.01 * length]
            boundary = {"kind": "free_overfall"}
            x0, ys = x1, to
        else:
            y0 = yc * r.uniform(1.3, 2.5)
            need(y0 < 0.9 * ch.sec.height)
            x0, ys = length, y0
            boundary = {"kind": "depth", "value": y0}
        points = points[::-1]
        def tame(x, y):
            need(1.02 * ch.critical(flow.q(x)) < y < 0.93 * ch.sec.height, "leaves its branch")
            return flow.rate(x, y)
        # reject draws that come near critical depth
        march(tame, x0, ys, [0.0], rtol=1e-8)
        got = depths_of(flow, x0, ys, points)
        if letter == "S":  # from a pool: the supercritical stream from critical depth at 0 must be the weaker at once
            need(ch.M(got[-1], q0) > 1.1 * ch.M(ch.critical(q0), q0))
        case = Case(name, q0, boundary).control(length, y0, boundary["kind"])
    else:
        ys = ch.critical(q0) * r.uniform(0.3, 0.85)
        def tame(x, y):
            need(y < 0.97 * ch.critical(flow.q(x)), "leaves its branch")
            return flow.rate(x, y)
        march(tame, 0.0, ys, [length], rtol=1e-8)
        got = depths_of(flow, 0.0, ys, points)
        need(letter == "S")
        # no subcritical stream may rise from the brink
        need(flow.N(length, yc) > 0, "critical at the brink")
        # nor a control stand inside
        for k in range(100):
            x = length * k / 99
            need(flow.N(x, ch.critical(flow.q(x))) > 0, "control inside")
        case = Case(name, q0, {"kind": "free_overfall"}, {"kind": "depth", "value": ys}).control(0.0, ys, "depth")
    case.reaches(reach(ch, length, lateral=lat))
    for p, y in zip(points, got):
        case.d["expect"].append([p, y, None])
    return case.done()


def lateral_control(r, name):
    """A side-channel spillway: F = 1 with a zero numerator inside the reach is a control (Hinds 1926)."""
    kind = r.choice(["rectangular", "trapezoidal"])
    ch = Channel(kind, draw_section(r, kind), draw_law(r), figures(r.uniform(0.02, 0.2), 3))
    length = figures(r.uniform(20, 100), 3)
    lat = figures(r.uniform(0.05, 1), 3)
    q0 = figures(lat * length * r.uniform(0.01, 0.1), 3)
    flow = Lateral(ch, q0, lat)
    f = lambda x: flow.N(x, ch.critical(flow.q(x)))
    marks = [length * k / 200 for k in range(201)]
    signs = [f(x) for x in marks]
    need(signs[0] < 0 < signs[-1], "no change")
    need(sum(1 for a, b in zip(signs, signs[1:]) if a * b <= 0) == 1, "several")
    xc = root(f, 0.0, length)
    need(0.15 * length < xc < 0.85 * length)
    yc = ch.critical(flow.q(xc))
    # dx/ds = D, dy/ds = N around the saddle; the way out with falling depth downstream along its eigenvectors
    def field(x, y):
        return ch.D(y, flow.q(x)), flow.N(x, y)
    e = 1e-5
    jx = [(a - b) / (2 * e * xc) for a, b in zip(field(xc * (1 + e), yc), field(xc * (1 - e), yc))]
    jy = [(a - b) / (2 * e * yc) for a, b in zip(field(xc, yc * (1 + e)), field(xc, yc * (1 - e)))]
    # slope m: m = (Nx + Ny m)/(Dx + Dy m)
    qa, qb, qc = jy[0], jx[0] - jy[1], -jx[1]
    disc = qb * qb - 4 * qa * qc
    need(disc > 0, "no saddle")
    slopes = [(-qb - math.sqrt(disc)) / (2 * qa), (-qb + math.sqrt(disc)) / (2 * qa)]
    # subcritical upstream, supercritical downstream: F rises, so D falls along x: Dx + Dy m < 0
    falling = [m for m in slopes if jx[0] + jy[0] * m < 0]
    need(len(falling) == 1, "no falling branch")
    m = falling[0]
    step = 3e-6 * length
    results = {}
    for s, side in ((-1, "up"), (1, "down")):
        x = xc + s * step
        # second order of the curve from a small shooting is not needed: the curve draws its neighbours to itself away from the saddle
        y = yc + s * step * m
        results[side] = (x, y)
    up = [xc * k / 6 for k in (5.2, 4, 3, 2, 1, 0)]
    down = [xc + (length - xc) * k / 6 for k in (0.8, 2, 3, 4, 5)] + [length]
    got = march(flow.rate, *results["up"], up) + march(flow.rate, *results["down"], down)
    # the same with a start five times farther off: what is left of the start must be nothing
    step *= 5
    again = march(flow.rate, xc - step, yc - step * m, up) + march(flow.rate, xc + step, yc + step * m, down)
    for a, b in zip(got, again):
        need(abs(a - b) < 3e-9 * a, "the start shows")
        WORST["DOP853 against another method"] = max(WORST["DOP853 against another method"], abs(a - b) / a)
    case = Case(name, q0, {"kind": "free_overfall"}).reaches(reach(ch, length, lateral=lat)).control(xc, yc, "critical")
    # a steep first reach left to itself starts at critical depth, which must lose against the subcritical stream at once
    y_top = got[5]
    need(ch.M(y_top, q0) > 1.05 * ch.M(ch.critical(q0), q0))
    for p, y in sorted(zip(up + down, got)):
        case.d["expect"].append([p, y, None])
    return case.done()


# ------------------------------------------------------------------------------------------------ stations

class Interval:
    """Between two stations: at equal depth area, width, first moment, perimeter and conveyance vary linearly, and so does the bed."""

    def __init__(self, one, two, xa, xb, za, zb, q, alpha):
        self.one, self.two, self.xa, self.xb, self.q, self.alpha = one, two, xa, xb, q, alpha
        self.slope = (za - zb) / (xb - xa)
        self.cos = math.sqrt((1 - self.slope) * (1 + self.slope))

    def both(self, y):
        out = []
        for c in (self.one, self.two):
            a, p, t, m = c.sec.at(y)
            out.append((a, t, m, c.conveyance(a, p, self.q)))
        return out

    def mix(self, x, y):
        w = (x - self.xa) / (self.xb - self.xa)
        one, two = self.both(y)
        return [u + (v - u) * w for u, v in zip(one, two)], (two[0] - one[0]) / (self.xb - self.xa)

    def parts(self, x, y):
        """dE/ddepth and S0 - Sf - dE/dx at constant depth."""
        (a, t, _, k), da = self.mix(x, y)
        g = self.alpha * self.q ** 2 / (GRAVITY * a ** 3)
        return self.cos - g * t, self.slope - (self.q / k) ** 2 + g * da

    def rate(self, x, y):
        d, n = self.parts(x, y)
        return n / d

    def E(self, x, y):
        return y * self.cos + self.alpha * self.q ** 2 / (2 * GRAVITY * self.mix(x, y)[0][0] ** 2)

    def M(self, x, y):
        a, _, m, _ = self.mix(x, y)[0]
        return self.q ** 2 / (GRAVITY * a) + self.cos * m

    def critical(self, x):
        return root(lambda y: self.parts(x, y)[0], 1e-4, 100.0)


class River:
    def __init__(self, channels, xs, zs, q, alpha=1.0):
        self.channels, self.xs, self.zs, self.q, self.alpha = channels, xs, zs, q, alpha
        self.parts = [Interval(a, b, xs[i], xs[i + 1], zs[i], zs[i + 1], q, alpha) for i, (a, b) in enumerate(zip(channels, channels[1:]))]

    def part(self, x):
        for p in self.parts:
            if p.xa < x < p.xb:
                return p
        raise ValueError(x)

    def step_across(self, a, b, x, y, sub):
        """A station is a joint without losses."""
        energy = a.E(x, y)
        yc = b.critical(x)
        need(b.E(x, yc) < energy, "critical at a station")
        f = lambda v: b.E(x, v) - energy
        return root(f, yc, 100.0) if sub else root(f, 1e-4, yc)

    def sweep(self, x0, y0, s, points, method="DOP853", rtol=1e-13, margin=1.02):
        """Depths at points inside intervals, marching from x0 (an end) in direction s."""
        parts = self.parts if s > 0 else self.parts[::-1]
        y, got = y0, {}
        previous = None
        for p in parts:
            a, b = (p.xa, p.xb) if s > 0 else (p.xb, p.xa)
            if s * (b - x0) <= 0:
                continue
            start = a if s * (a - x0) > 0 else x0
            if previous is not None:
                y = self.step_across(previous, p, start, y, s < 0)
            inside = sorted([v for v in points if p.xa < v < p.xb and s * (v - start) > 0], reverse=s < 0)
            def rate(x, v):
                d, n = p.parts(x, v)
                need(abs(d) > (margin - 1) * p.cos and (d > 0) == (s < 0), "leaves its branch")
                return n / d
            depths = march(rate, start, y, inside + [b], rtol=rtol, method=method)
            got.update(zip(inside, depths))
            y = depths[-1]
            previous = p
        got["end"] = y
        return got

    def stations(self):
        out = []
        for c, x, z in zip(self.channels, self.xs, self.zs):
            d = {"kind": c.kind, "section": c.section, "law": c.law, "chainage": x, "bed_level": z}
            if self.alpha != 1:
                d["energy_coefficient"] = self.alpha
            out.append(d)
        return out


def draw_river(r, letter, count, closed=False):
    q = figures(math.exp(r.uniform(math.log(1), math.log(60))), 3)
    alpha = r.choice([1.0, 1.0, 1.1])
    channels, xs, zs = [], [0.0], [figures(r.uniform(20, 80), 4)]
    kind = r.choice(["mixed", "rectangular", "trapezoidal", "surveyed", "parabolic"])
    width = figures(1.2 * q ** 0.45 + 1, 3)
    base = draw_law(r, r.choice(["manning", "manning", "chezy", "sand_roughness"]))
    for i in range(count):
        k = r.choice(["rectangular", "trapezoidal", "surveyed"]) if kind == "mixed" else kind
        w = figures(width * r.uniform(0.85, 1.15), 3)
        if k == "rectangular":
            s = {"bottom_width": w}
        elif k == "trapezoidal":
            s = {"bottom_width": w, "left_side_slope": figures(r.uniform(0.5, 2), 2), "right_side_slope": figures(r.uniform(0.5, 2), 2)}
        elif k == "parabolic":
            s = {"top_width": 2 * w, "height": figures(w * r.uniform(0.3, 0.5), 3)}
        else:
            n = r.choice([4, 5, 6])
            # a line that starts and ends high, with a bed of its own; its lowest point is the station's bed level
            mid = sorted(figures(r.uniform(-w / 2, w / 2), 3) for _ in range(n - 2))
            need(all(b - a > 0.05 * w for a, b in zip(mid, mid[1:])))
            low = [figures(r.uniform(0.0, 0.02) * w, 3) for _ in mid]
            low[r.randrange(len(low))] = 0.0
            s = {"points": [[mid[0] - 1.2 * w, 12.0]] + [[a, b] for a, b in zip(mid, low)] + [[mid[-1] + 1.2 * w, 12.0]]}
        law = dict(base)
        key = next(iter(law))
        law[key] = figures(law[key] * r.uniform(0.9, 1.1), 3)
        channels.append(Channel(k, s, law, 0.0, 1, alpha))
    typical = channels[0]
    yc = typical.critical(q)
    sc = typical.friction(yc, q)
    factor = {"M": (0.1, 0.5), "S": (2, 5)}[letter]
    for i in range(1, count):
        dx = figures(r.uniform(8, 60) * yc, 3)
        xs.append(xs[-1] + dx)
        zs.append(round(zs[-1] - dx * sc * r.uniform(*factor), 4))
    for c, z in zip(channels, zs):
        if c.kind == "surveyed":
            c.section = {"points": [[a, b + z] for a, b in c.section["points"]]}
            c.sec = Channel(c.kind, c.section, c.law, 0.0).sec
    # surveyed sections carry their own levels: the lowest point, exactly
    zs = [min(b for _, b in c.section["points"]) if c.kind == "surveyed" else z for c, z in zip(channels, zs)]
    return River(channels, xs, zs, q, alpha)


def inner_points(r, river, most=14):
    points = []
    for p in river.parts:
        points += [p.xa + (p.xb - p.xa) * t for t in ((0.5 + r.uniform(-0.2, 0.2),) if len(river.parts) > 6 else (0.2 + r.uniform(-0.1, 0.1), 0.7 + r.uniform(-0.1, 0.1)))]
    return points[:: max(1, len(points) // most)]


def no_control(river, letter):
    """No section of the river is a control of its own."""
    for p in river.parts:
        for k in range(21):
            x = p.xa + (p.xb - p.xa) * min(max(k / 20, 1e-9), 1 - 1e-9)
            n = p.parts(x, p.critical(x))[1]
            need(n < 0 if letter == "M" else n > 0, "a control")


def stations(r, name, letter, count):
    river = draw_river(r, letter, count)
    no_control(river, letter)
    points = inner_points(r, river)
    last, first = river.parts[-1], river.parts[0]
    if letter == "M":
        y0 = last.critical(river.xs[-1]) * r.uniform(1.3, 2.2)
        got = river.sweep(river.xs[-1], y0, -1, points, margin=1.05)
        again = river.sweep(river.xs[-1], y0, -1, points, "Radau", 1e-10, margin=1.04)
        case = Case(name, river.q, {"kind": "depth", "value": y0}).control(river.xs[-1], y0, "depth")
    else:
        y0 = first.critical(0.0) * r.uniform(0.4, 0.85)
        got = river.sweep(0.0, y0, 1, points, margin=1.05)
        again = river.sweep(0.0, y0, 1, points, "Radau", 1e-10, margin=1.04)
        case = Case(name, river.q, {"kind": "free_overfall"}, {"kind": "depth", "value": y0}).control(0.0, y0, "depth")
    case.d["stations"] = river.stations()
    del case.d["datum"]
    for p in points:
        off = abs(got[p] - again[p]) / got[p]
        WORST["DOP853 against another method"] = max(WORST["DOP853 against another method"], off)
        assert off < 3e-8, (name, off)
        case.d["expect"].append([p, got[p], None])
    return case.done()


def stations_jump(r, name, count):
    """A steep, then mild surveyed stretch: a supercritical stream from upstream jumps within it."""
    river = draw_river(r, "M", count)
    no_control(river, "M")
    first, last = river.parts[0], river.parts[-1]
    y1 = first.critical(0.0) * r.uniform(0.3, 0.6)
    y2 = last.critical(river.xs[-1]) * r.uniform(1.15, 1.8)
    grid = [p.xa + (p.xb - p.xa) * t for p in river.parts for t in np.linspace(0.02, 0.98, 25).tolist()]
    sub = river.sweep(river.xs[-1], y2, -1, grid, margin=1.03)
    # the supercritical stream, as far as it goes
    parts, y, sup, previous = river.parts, y1, {}, None
    try:
        for p in parts:
            if previous is not None:
                y = river.step_across(previous, p, p.xa, y, False)
            inside = [v for v in grid if p.xa < v < p.xb]
            x = p.xa
            for v in inside + [p.xb]:
                def rate(t, w):
                    d, n = p.parts(t, w)
                    need(d < -0.03 * p.cos, "end")
                    return n / d
                y = march(rate, x, y, [v])[0]
                x = v
                sup[v] = y
            previous = p
    except Reject:
        pass
    common = [v for v in grid if v in sup]
    gaps = [river.part(v).M(v, sup[v]) - river.part(v).M(v, sub[v]) for v in common]
    need(gaps and gaps[0] > 0, "drowned")
    where = next((i for i, g in enumerate(gaps) if g < 0), None)
    need(where is not None and where > 1, "swept out or ends")
    a, b = common[where - 1], common[where]
    part = river.part(a)
    need(part is river.part(b), "near a station")
    f = lambda x: part.M(x, march(part.rate, a, sup[a], [x])[0]) - part.M(x, march(part.rate, b, sub[b], [x])[0])
    x = root(f, a, b)
    ya, yb = march(part.rate, a, sup[a], [x])[0], march(part.rate, b, sub[b], [x])[0]
    need(yb > 1.15 * ya)
    case = Case(name, river.q, {"kind": "depth", "value": y2}, {"kind": "depth", "value": y1})
    case.d["stations"] = river.stations()
    del case.d["datum"]
    clear = 0.005 * river.xs[-1]
    step = max(1, len(grid) // 14)
    for v in grid[::step]:
        if v < x - clear:
            case.d["expect"].append([v, sup[v], None])
        elif v > x + clear:
            case.d["expect"].append([v, sub[v], None])
    return case.jump(x, ya, yb).control(0.0, y1, "depth").control(river.xs[-1], y2, "depth").done()


def stations_control(r, name, count):
    """Surveyed, mild first and steep then: critical depth at the station between, without being told."""
    mild = draw_river(r, "M", count)
    at = r.randrange(1, count - 1)
    xs, zs = mild.xs, [mild.zs[0]]
    yc = mild.channels[0].critical(mild.q)
    sc = mild.channels[0].friction(yc, mild.q)
    need(all(c.kind != "surveyed" for c in mild.channels), "levels of their own")
    for i in range(1, count):
        zs.append(round(zs[-1] - (xs[i] - xs[i - 1]) * sc * (r.uniform(0.1, 0.4) if i <= at else r.uniform(3, 6)), 4))
    river = River(mild.channels, xs, zs, mild.q, mild.alpha)
    for p in river.parts:
        for k in range(21):
            x = p.xa + (p.xb - p.xa) * min(max(k / 20, 1e-9), 1 - 1e-9)
            n = p.parts(x, p.critical(x))[1]
            need(n < 0 if p.xb <= xs[at] else n > 0, "a control elsewhere")
    upper, lower, x = river.parts[at - 1], river.parts[at], xs[at]
    y = upper.critical(x)
    need(upper.E(x, y) > lower.E(x, lower.critical(x)) * (1 + 1e-9))
    to = y * 1.05
    got = solve_ivp(lambda v, t: [upper.parts(t[0], v)[0] / upper.parts(t[0], v)[1]], (y, to), [x], method="DOP853", rtol=1e-13, atol=1e-13)
    x_off = got.y[0][-1]
    need(x_off > upper.xa + 0.2 * (upper.xb - upper.xa))
    points = [v for v in inner_points(r, river) if v < x_off - 1e-3 or v > x]
    up = river.sweep(x_off, to, -1, [v for v in points if v < x], margin=1.03)
    y_in = river.step_across(upper, lower, x, y, False)
    v = y_in * 0.97
    got = solve_ivp(lambda v, t: [lower.parts(t[0], v)[0] / lower.parts(t[0], v)[1]], (y_in, v), [x], method="DOP853", rtol=1e-13, atol=1e-13)
    x_in = got.y[0][-1]
    need(x_in < lower.xb - 0.1 * (lower.xb - lower.xa))
    down = river.sweep(x_in, v, 1, [w for w in points if w > x_in], margin=1.015)
    case = Case(name, river.q, {"kind": "free_overfall"}).control(x, y, "critical")
    case.d["stations"] = river.stations()
    del case.d["datum"]
    for w in points:
        if w in up or w in down:
            case.d["expect"].append([w, up.get(w, down.get(w)), None])
    return case.done()


# ------------------------------------------------------------------------------------------------ longer chains and other laws

def odd_law(r, name, letter, number, which):
    """A single reach with a law that varies with depth, or with zones."""
    size = figures(r.uniform(2, 10), 3)
    if which == "zones":
        kind = "two_stage"
        section = {"bottom_width": size, "side_slope": figures(r.uniform(0.5, 2), 2), "bench_height": figures(r.uniform(0.6, 1.5), 2),
                   "left_bench_width": figures(r.uniform(1, 3) * size, 2), "right_bench_width": figures(r.uniform(1, 3) * size, 2), "upper_side_slope": figures(r.uniform(1, 3), 2)}
        half = size / 2 + section["side_slope"] * section["bench_height"]
        law = {"zones": [figures(r.uniform(0.03, 0.07), 2), figures(r.uniform(0.02, 0.035), 2), figures(r.uniform(0.03, 0.07), 2)], "until": [-half, half], "combine": "divided"}
    else:
        kind = r.choice(["rectangular", "trapezoidal"])
        section = draw_section(r, kind)
        if which == "bed":
            law = {"bed": figures(r.uniform(0.02, 0.04), 2), "sides": figures(r.uniform(0.01, 0.03), 2), "combine": "horton_einstein"}
        else:
            law = {"manning_by_depth": [[0.3, figures(r.uniform(0.03, 0.05), 2)], [0.8, figures(r.uniform(0.02, 0.03), 2)], [1.7, figures(r.uniform(0.02, 0.04), 2)]]}
    slope = figures(10 ** (r.uniform(-3.5, -2.7) if letter == "M" else r.uniform(-1.8, -1.2)), 3)
    ch = Channel(kind, section, law, slope)
    yn = r.uniform(0.4, 2.5)
    q = figures(ch.conveyance(*ch.sec.at(yn)[:2], 1.0, yn) * math.sqrt(slope), 4)
    yc, yn = ch.critical(q), ch.normal(q)
    need(ch.slope_class(q) == letter and len(ch.normals(q)) == 1)
    if number == "1":
        y0, end = yn * r.uniform(1.2, 2), None
    elif number == "2" and letter == "M":
        y0 = yc + (yn - yc) * r.uniform(0.1, 0.5)
    elif number == "2":
        y0 = yn + (yc - yn) * r.uniform(0.3, 0.9)
    else:
        y0 = yn * r.uniform(0.4, 0.8)
    length = figures(distance(ch, q, y0, yn + (y0 - yn) * 10 ** -r.uniform(0.7, 3)), 4)
    if letter == "M":
        sweep = Sweep(ch, q, length, y0, -1, 0.0)
        case = Case(name, q, {"kind": "depth", "value": y0}).control(length, y0, "depth")
    else:
        sweep = Sweep(ch, q, 0.0, y0, 1, length)
        case = Case(name, q, {"kind": "free_overfall"}, {"kind": "depth", "value": y0}).control(0.0, y0, "depth")
    return case.reaches(reach(ch, length)).along(sweep, spread(r, 0.0, length), lambda y: ch.curve(y, q)).done()


def tranquil_chain(r, name, count):
    """Subcritical through many joints with everything that a joint may have, and inflow along some reaches."""
    channels, q = [], [figures(math.exp(r.uniform(math.log(0.5), math.log(20))), 4)]
    inflows, laterals, lengths = [], [], []
    for i in range(count):
        kind = r.choice(["rectangular", "trapezoidal", "triangular", "parabolic", "u_shaped", "circular", "box", "egg"])
        section = draw_section(r, kind)
        law = draw_law(r)
        ch = Channel(kind, section, law, r.choice([0.0, figures(10 ** r.uniform(-4, -2.7), 3), -figures(10 ** r.uniform(-5, -3.5), 3)]), r.choice([1, 1, 2, 3]))
        inflow = figures(q[-1] * r.uniform(0.05, 0.3), 3) if i and r.random() < 0.3 else 0.0
        length = figures(r.uniform(10, 300), 3)
        lat = figures(q[-1] * r.uniform(0.05, 0.3) / length, 3) if r.random() < 0.25 and kind not in CLOSED else 0.0
        start = q[-1] + inflow
        end = start + lat * length
        yc = ch.critical(end)
        need(0.1 < yc < 3 and (kind not in CLOSED or yc < 0.6 * ch.sec.height))
        channels.append(ch)
        inflows.append(inflow)
        laterals.append(lat)
        lengths.append(length)
        q += [start, end]
    ends = [sum(lengths[:i + 1]) for i in range(count)]
    starts = [0.0] + ends[:-1]
    last = channels[-1]
    y = last.critical(q[-1]) * r.uniform(1.2, 2.5)
    need(y < 0.93 * last.sec.height)
    case = Case(name, q[0], {"kind": "depth", "value": y}, None, figures(r.uniform(0, 100), 4)).control(ends[-1], y, "depth")
    reaches = []
    joint = {}
    for i in reversed(range(count)):
        ch, qa, qb = channels[i], q[2 * i + 1], q[2 * i + 2]
        points = spread(r, starts[i], ends[i], 5, ends=False)
        if laterals[i]:
            flow = Lateral(ch, qa, laterals[i])
            def tame(x, v):
                need(1.05 * ch.critical(flow.q(x)) < v < 0.93 * ch.sec.height, "leaves its branch")
                return flow.rate(x, v)
            march(tame, lengths[i], y, [0.0], rtol=1e-7)
            got = depths_of(flow, lengths[i], y, [p - starts[i] for p in reversed(points)] + [0.0])
            for p, v in zip(reversed(points), got):
                case.d["expect"].append([p, v, None])
            y = got[-1]
        else:
            sub = Sweep(ch, qb, ends[i], y, -1, starts[i])
            need(sub.end == starts[i])
            y = sub(starts[i])
            need(all(sub(p) < 0.93 * ch.sec.height or ch.is_full(sub(p)) for p in [starts[i]] + points), "near the crown")
            need(all(sub(p) > 1.02 * ch.critical(qb) for p in [starts[i]] + points))
            case.along(sub, points, lambda v: ch.curve(v, qb))
        d = reach(ch, lengths[i], inflow=inflows[i], lateral=laterals[i], **joint)
        if "entry" in d:
            pass
        reaches.insert(0, d)
        if i:
            drop = r.choice([0.0, 0.0, figures(0.2 * y, 2)])
            loss, entry = r.choice([0.0, 0.0, 0.3, 1.0]), r.choice([0.0, 0.0, 0.5, 1.5])
            if entry:
                reaches[0]["entry"] = entry
            yu, who = join_up(channels[i - 1], ch, q[2 * i], qa, y, drop, loss, entry)
            need(who == "sweep", who)
            need(yu > 1.05 * channels[i - 1].critical(q[2 * i]) and (yu < 0.93 * channels[i - 1].sec.height or channels[i - 1].sec.closed and yu > 1.02 * channels[i - 1].sec.height), "near the crown")
            joint = {"drop": drop, "loss": loss}
            y = yu
    # a first reach that is steep would start at critical depth; only mild ones come here
    need(channels[0].slope_class(q[2]) != "S")
    return case.reaches(*reaches).done()


def turns_at_joint(r, name):
    """A supercritical stream stronger than the water below above a joint, and weaker below it: it turns there, and no jump is told."""
    a, b, q = pair(r, "SM", False)
    ya, yb = a.critical(q), b.critical(q)
    y2 = b.normal(q) * r.uniform(0.9, 1.6)
    need(1.1 * yb < y2 < 0.93 * b.sec.height)
    la, lb = figures(r.uniform(20, 100) * ya, 3), figures(r.uniform(20, 100) * yb, 3)
    super_a, sub_b = Sweep(a, q, 0.0, ya, 1, la), Sweep(b, q, la + lb, y2, -1, la)
    need(sub_b.end == la)
    y_in = join_down(a, b, q, q, super_a(la))
    need(b.M(y_in, q) < 0.98 * b.M(sub_b(la), q))
    y_out, who = join_up(a, b, q, q, sub_b(la))
    need(who == "sweep")
    sub_a = Sweep(a, q, la, y_out, -1, 0.0)
    need(a.M(super_a(la), q) > 1.02 * a.M(y_out, q) and crossing(super_a, sub_a, 0.0, la) is None)
    pa, pb = spread(r, 0.0, la, 6)[:-1], spread(r, la, la + lb, 6)[1:]
    return Case(name, q, {"kind": "depth", "value": y2}).reaches(reach(a, la), reach(b, lb)).along(super_a, pa, lambda y: a.curve(y, q)).along(
        sub_b, pb, lambda y: b.curve(y, q)).control(0.0, ya, "critical").control(la + lb, y2, "depth").done()


def culvert(r, name):
    """A channel, a culvert that runs full below a drowned outlet, a channel."""
    a, q = draw_channel(r, "M", r.choice(["rectangular", "trapezoidal"]), extras=False)
    kind = r.choice(["box", "circular"])
    ch = Channel(kind, draw_section(r, kind), draw_law(r), figures(10 ** r.uniform(-3.5, -2), 3), r.choice([1, 2, 3]))
    need(ch.critical(q) < 0.8 * ch.sec.height)
    h = ch.sec.height
    y3 = figures(h * r.uniform(1.1, 2), 4)
    l1, l2, l3 = figures(r.uniform(30, 200), 3), figures(r.uniform(10, 60), 3), figures(r.uniform(20, 100), 3)
    entry, loss1, loss2 = r.choice([0.2, 0.5, 0.9]), r.choice([0.0, 0.1]), r.choice([0.3, 1.0])
    need(a.critical(q) * 1.3 < y3)
    sub3 = Sweep(a, q, l1 + l2 + l3, y3, -1, l1 + l2)
    y2, who = join_up(ch, a, q, q, sub3(l1 + l2), 0.0, loss2, 0.0)
    need(who == "sweep" and y2 > 1.01 * h)
    sub2 = Sweep(ch, q, l1 + l2, y2, -1, l1)
    need(sub2(l1) > 1.01 * h)
    y1, who = join_up(a, ch, q, q, sub2(l1), 0.0, loss1, entry)
    need(who == "sweep" and y1 > a.critical(q) * 1.1)
    sub1 = Sweep(a, q, l1, y1, -1, 0.0)
    f = lambda y: a.curve(y, q)
    return Case(name, q, {"kind": "depth", "value": y3}).reaches(reach(a, l1, loss=loss1), reach(ch, l2, entry=entry, loss=loss2), reach(a, l3)).along(
        sub1, spread(r, 0.0, l1, 5)[:-1], f).along(sub2, spread(r, l1, l1 + l2, 5)[1:-1], lambda y: "").along(sub3, spread(r, l1 + l2, l1 + l2 + l3, 5)[1:], f).control(
        l1 + l2 + l3, y3, "depth").done()


def lateral_jump(r, name):
    """A jump in a reach with inflow along it."""
    ch, q2 = draw_channel(r, "M", r.choice(["rectangular", "trapezoidal", "parabolic", "triangular"]), extras=False)
    q0 = figures(q2 * r.uniform(0.7, 0.95), 4)
    y1 = ch.critical(q0) * r.uniform(0.3, 0.6)
    length = figures(r.uniform(20, 120) * y1, 3)
    lat = figures((q2 - q0) / length, 3)
    flow = Lateral(ch, q0, lat)
    y2 = ch.critical(flow.q(length)) * r.uniform(1.2, 2)
    grid = [length * k / 100 for k in range(101)]
    def tame(low, high):
        def rate(x, v):
            need(low * ch.critical(flow.q(x)) < v < high * ch.critical(flow.q(x)), "leaves its branch")
            return flow.rate(x, v)
        return rate
    sub = dict(zip(grid[::-1], march(tame(1.03, 50), length, y2, grid[::-1])))
    sup, y = {}, y1
    for a, b in zip(grid, grid[1:]):
        sup[a] = y
        try:
            y = march(tame(0.0, 0.97), a, y, [b])[0]
        except Reject:
            break
    gaps = [(x, ch.M(sup[x], flow.q(x)) - ch.M(sub[x], flow.q(x))) for x in grid if x in sup]
    need(gaps[0][1] > 0, "drowned")
    k = next((i for i, g in enumerate(gaps) if g[1] < 0), None)
    need(k is not None and 3 < k < 95, "no jump")
    a, b = gaps[k - 1][0], gaps[k][0]
    up = lambda x: march(flow.rate, a, sup[a], [x])[0]
    down = lambda x: march(flow.rate, b, sub[b], [x])[0]
    x = root(lambda x: ch.M(up(x), flow.q(x)) - ch.M(down(x), flow.q(x)), a, b)
    case = Case(name, q0, {"kind": "depth", "value": y2}, {"kind": "depth", "value": y1}).reaches(reach(ch, length, lateral=lat)).jump(x, up(x), down(x))
    case.control(0.0, y1, "depth").control(length, y2, "depth")
    for v in grid[::9] + [length]:
        if abs(v - x) > 0.005 * length and v not in [e[0] for e in case.d["expect"]]:
            case.d["expect"].append([v, sup[v] if v < x else sub[v], None])
    return case.done()


# ------------------------------------------------------------------------------------------------ closed conduits

def full_throughout(r, name, kind):
    """A barrel full from end to end below a drowned outlet."""
    ch = Channel(kind, draw_section(r, kind), draw_law(r), figures(10 ** r.uniform(-3.5, -1.7), 3), r.choice([1, 2]))
    h = ch.sec.height
    q = figures(ch.barrels * math.sqrt(GRAVITY * h) * ch.sec.full()[0] * r.uniform(0.2, 0.7), 4)
    length = figures(r.uniform(10, 100) * h, 3)
    rate = ch.N(2 * h, q) / ch.cos
    y0 = figures(max(h, h + rate * length) + h * r.uniform(0.1, 1), 5)
    sweep = Sweep(ch, q, length, y0, -1, 0.0)
    need(sweep(0.0) > h * 1.01)
    datum = figures(r.uniform(0, 50), 3)
    boundary, y0 = boundary_for(r, ch, y0, q, datum, "downstream")
    sweep = Sweep(ch, q, length, y0, -1, 0.0)
    # a steep barrel's own start at critical depth must be the weaker
    return Case(name, q, boundary, None, datum).reaches(reach(ch, length)).along(sweep, spread(r, 0.0, length, 6), lambda y: "").control(length, y0, boundary["kind"]).done()


def full_to_free(r, name, kind):
    """Full at the outlet, free farther up: the pressure line comes down to the crown."""
    ch, q = draw_channel(r, "M", kind, fill=r.uniform(0.2, 0.5))
    h = ch.sec.height
    need(ch.friction(h * 1.5, q) < 0.8 * ch.slope and len(ch.normals(q)) == 1, "stays full")
    over = h * r.uniform(0.1, 1)
    y0 = figures(h + over, 5)
    full_length = (y0 - h) * ch.cos / ch.N(2 * h, q)
    length = figures(full_length * r.uniform(1.3, 3), 4)
    sweep = Sweep(ch, q, length, y0, -1, 0.0)
    need(sweep(0.0) < 0.97 * h)
    x = length - full_length
    points = [v for v in spread(r, 0.0, length, 14) if abs(v - x) > 0.01 * length]
    held(sweep, [v for v in points if v < x])
    return Case(name, q, {"kind": "depth", "value": y0}).reaches(reach(ch, length)).along(sweep, points, lambda y: ch.curve(y, q) if y < h else "").control(length, y0, "depth").done()


def two_normal(r, name, kind, where):
    """More than the full barrel carries, less than it can carry at most: two normal depths."""
    section, law, slope = draw_section(r, kind), draw_law(r), figures(10 ** r.uniform(-3.5, -2.6), 3)
    ch = Channel(kind, section, law, slope)
    h = ch.sec.height
    a, p, _, _ = ch.sec.full()
    probe = 1.0
    for _ in range(50):
        probe = ch.conveyance(a, p, probe) * math.sqrt(slope)
    q = figures(probe * r.uniform(1.01, 1.04), 5)
    normals = ch.normals(q)
    need(len(normals) == 2, "not two")
    lo, hi = normals
    need(ch.slope_class(q) == "M")
    if where == "between":
        y0 = lo + (hi - lo) * r.uniform(0.2, 0.9)
        length = figures(distance(ch, q, y0, lo + (y0 - lo) * 0.01), 4)
    elif where == "below":
        y0 = ch.critical(q) * 1.05
        length = figures(distance(ch, q, y0, lo - (lo - y0) * 0.01), 4)
    else:
        y0 = hi + (h - hi) * r.uniform(0.1, 0.7)
        length = figures(r.uniform(30, 300) * h, 3)
    sweep = Sweep(ch, q, length, y0, -1, 0.0)
    points = spread(r, 0.0, length)
    if where == "above":
        need(sweep(0.0) > h * 1.001, "stays free")
        full = next(p for p in sweep.panels if p[4] == "full")
        points = [v for v in points if abs(v - full[0]) > 0.02 * length]
    else:
        held(sweep, points)
    return Case(name, q, {"kind": "depth", "value": y0}).reaches(reach(ch, length)).along(sweep, points, lambda y: ch.curve(y, q) if y < h else "").control(length, y0, "depth").done()


def jump_to_full(r, name, kind):
    """A steep barrel with a drowned outlet: S2 from the inlet, then a jump that fills the barrel."""
    ch, q = draw_channel(r, "S", kind, fill=r.uniform(0.4, 0.75), extras=False)
    h = ch.sec.height
    yc, yn = ch.critical(q), ch.normal(q)
    length = figures(r.uniform(20, 60) * h, 3)
    super_ = Sweep(ch, q, 0.0, yc, 1, length)
    need(ch.M(super_(length), q) > 1.05 * ch.M(h, q), "the sequent depth lies below the crown")
    y2 = h + (ch.M(super_(length), q) - ch.M(h, q)) / (ch.cos * ch.sec.full()[0]) + length * ch.slope * r.uniform(0.2, 0.6)
    y2 = figures(y2, 6)
    sub = Sweep(ch, q, length, y2, -1, 0.0)
    full = sub.panels[0]
    lo = max(full[1], 0.0)
    gap = lambda x: force_gap(super_, sub, x)
    need(gap(length) < 0, "swept out")
    need(gap(lo) > 0, "drowned or free")
    x = root(gap, lo, length)
    need(0.05 * length < x < 0.95 * length)
    before, after = spread(r, 0.0, x - 0.01 * length, 6), spread(r, x + 0.01 * length, length, 5)
    # farther up no weaker place may come first
    for v in spread(r, max(0.0, sub.end), x, 50)[1:-1]:
        need(gap(v) > 0)
    held(super_, before)
    return Case(name, q, {"kind": "depth", "value": y2}).reaches(reach(ch, length)).along(super_, before, lambda y: ch.curve(y, q)).along(sub, after, lambda y: "").jump(
        x, super_(x), sub(x)).control(0.0, yc, "critical").control(length, y2, "depth").done()


# ------------------------------------------------------------------------------------------------ the list

def plan():
    out = []
    add = lambda name, f, *a, **k: out.append((name, f, a, k))
    for letter, number in ["M1", "M2", "M3", "S1", "S2", "S3", "C1", "C3", "H2", "H3", "A2", "A3"]:
        kinds = ["rectangular", "trapezoidal", "triangular", "parabolic", "circular", "egg", "u_shaped", "horseshoe", "surveyed"]
        for i, kind in enumerate(kinds):
            law = ["manning", "chezy", "sand_roughness", "strickler"][(i + ord(letter) + int(number)) % 4]
            add(f"{letter}{number} {kind} {law}", single, letter, number, kind=kind, law=law)
    for letter, number in ["M2", "H2", "A2"]:
        for kind in ("rectangular", "trapezoidal", "circular", "egg"):
            add(f"{letter}{number} from a brink, {kind}", single, letter, number, kind=kind, start="overfall")
    for kind in ("rectangular", "trapezoidal", "circular", "surveyed"):
        add(f"S2 from a pool, {kind}", single, "S", "2", kind=kind, start="pool")
    for letter, number in ["M1", "M2", "S2", "S3"]:
        for kind in ("trapezoidal", "circular"):
            add(f"{letter}{number} within 1e-9 of normal depth, {kind}", single, letter, number, kind=kind, start="near")
    for letter, number in ["M1", "M2", "S2", "S3"]:
        add(f"{letter}{number} over 100 km", single, letter, number, kind="trapezoidal", length=100000.0)
        add(f"{letter}{number} over 1 m", single, letter, number, kind="trapezoidal", length=1.0)
    for letter, number in ["S1", "S2", "S3"]:
        for kind in ("rectangular", "trapezoidal", "triangular"):
            add(f"{letter}{number} steeper than 0.2, {kind}", single, letter, number, kind=kind, slope_limit=(0.2, 0.4))
    for i, (depth, q) in enumerate([(1.5, 3.0), (0.9, 0.5), (4.0, 40.0)]):
        add(f"M slope 1e-9, {i}", fixed, "trapezoidal", {"bottom_width": 5.0, "left_side_slope": 1.5, "right_side_slope": 1.5}, {"manning": 0.03}, 1e-9, q, 2000.0,
            {"kind": "depth", "value": depth}, None, depth, -1)
    add("M slope 1e-9 over 100 km from a brink", fixed, "rectangular", {"bottom_width": 8.0}, {"manning": 0.025}, 1e-9, 4.0, 100000.0, {"kind": "free_overfall"}, None, "critical", -1)
    add("H2 over 50 km from a brink", fixed, "trapezoidal", {"bottom_width": 8.0, "left_side_slope": 1.0, "right_side_slope": 2.0}, {"chezy": 40.0}, 0.0, 12.0, 50000.0, {"kind": "free_overfall"}, None, "critical", -1)
    add("A2 adverse 0.01 from a brink", fixed, "triangular", {"left_side_slope": 2.0, "right_side_slope": 3.0}, {"manning": 0.02}, -0.01, 2.0, 150.0, {"kind": "free_overfall"}, None, "critical", -1)
    add("S2 at slope 0.5 from a pool", fixed, "rectangular", {"bottom_width": 2.0}, {"manning": 0.014}, 0.5, 6.0, 60.0, {"kind": "free_overfall"}, None, "critical", 1)
    add("discharge 1e-6", fixed, "triangular", {"left_side_slope": 1.0, "right_side_slope": 1.0}, {"manning": 0.012}, 0.001, 1e-6, 5.0, {"kind": "depth", "value": 0.02}, None, 0.02, -1)
    add("discharge 1e5", fixed, "trapezoidal", {"bottom_width": 800.0, "left_side_slope": 3.0, "right_side_slope": 3.0}, {"manning": 0.03}, 0.0001, 1e5, 80000.0, {"kind": "depth", "value": 40.0}, None, 40.0, -1)
    add("n 0.2", fixed, "trapezoidal", {"bottom_width": 2.0, "left_side_slope": 2.0, "right_side_slope": 2.0}, {"manning": 0.2}, 0.002, 3.0, 500.0, {"kind": "depth", "value": 3.0}, None, 3.0, -1)
    add("n 0.008", fixed, "rectangular", {"bottom_width": 2.0}, {"manning": 0.008}, 0.02, 3.0, 500.0, {"kind": "free_overfall"}, None, "critical", 1)
    for letter in "MMMMSSSS":
        add(f"uniform {letter} {len(out)}", uniform, letter)
    for how in ("broad_ideal", "broad", "sharp_rehbock", "sharp", "rating", "gate_downstream"):
        for i in range(3):
            add(f"{how} {i}", structure, how)
    for up, down in (("M3", "M1"), ("M3", "M2"), ("M3", "brink"), ("H3", "H2"), ("H3", "brink"), ("A3", "A2"), ("S2", "S1"), ("S3", "S1")):
        for i in range(4):
            add(f"jump {up} to {down} {i}", with_jump, up, down)
    for i in range(3):
        add(f"jump below a gate {i}", with_jump, "M3", "M1", gate=True)
        add(f"drowned gate {i}", drowned_gate)
    for i in range(6):
        add(f"mild to steep {i}", mild_steep, i % 2 == 0)
    for i in range(4):
        add(f"mild to mild {i}", mild_mild)
        add(f"mild to mild with losses {i}", mild_mild, loss=[0.1, 0.3, 0.5, 1.0][i], entry=[0.5, 0.0, 0.2, 1.0][i])
        add(f"mild to mild with an inflow {i}", mild_mild, inflow=[0.1, 0.3, 0.6, 1.0][i], loss=[0.0, 0.0, 0.3, 0.5][i])
        add(f"mild to mild with a drowned drop {i}", mild_mild, drop=[0.1, 0.2, 0.3, 0.4][i])
    for i in range(4):
        add(f"narrowing that chokes {i}", choke_entry, entry=[0.0, 0.5, 0.0, 0.2][i], loss=[0.0, 0.0, 0.3, 0.1][i])
        add(f"throat {i}", throat)
        add(f"steep to mild, jump below {i}", steep_mild, "below", i < 3)
        add(f"steep to mild, jump above {i}", steep_mild, "above", i < 3)
        add(f"drop {i}", drop_control, loss=[0.0, 0.0, 0.2, 0.5][i])
        add(f"steep to steep {i}", steep_steep, loss=[0.0, 0.3, 0.0, 0.5][i], drop=[0.0, 0.0, 0.5, 1.0][i])
    for i in range(3):
        add(f"steep to steep with an inflow {i}", steep_steep, inflow=[0.05, 0.1, 0.2][i])
        add(f"steep to steep with an entry loss {i}", steep_steep, entry=[0.05, 0.1, 0.2][i])
        add(f"inflow that chokes {i}", inflow_chokes)
    for i in range(6):
        add(f"lateral inflow, mild, subcritical {i}", lateral, "M", "sub")
    for i in range(3):
        add(f"lateral inflow, horizontal {i}", lateral, "H", "sub")
        add(f"lateral inflow, adverse {i}", lateral, "A", "sub")
        add(f"lateral inflow, steep, subcritical {i}", lateral, "S", "sub")
        add(f"lateral inflow, steep, supercritical {i}", lateral, "S", "super")
    for i in range(4):
        add(f"side channel with a control inside {i}", lateral_control)
    for i, count in enumerate([2, 2, 3, 3, 4, 6, 8, 12, 20, 40]):
        add(f"{count} stations, subcritical {i}", stations, "M", count)
    for i, count in enumerate([2, 3, 4, 8, 20]):
        add(f"{count} stations, supercritical {i}", stations, "S", count)
    for i, count in enumerate([2, 3, 4, 6, 10]):
        add(f"{count} stations with a jump {i}", stations_jump, count)
    for i, count in enumerate([3, 4, 6, 10]):
        add(f"{count} stations with a control {i}", stations_control, count)
    for which in ("zones", "bed", "manning_by_depth"):
        for letter, number in ("M1", "M2", "S2", "S3"):
            for i in range(2):
                add(f"{letter}{number} with {which} {i}", odd_law, letter, number, which)
    for i, count in enumerate([3, 3, 4, 4, 5, 6, 8]):
        add(f"{count} reaches, tranquil {i}", tranquil_chain, count)
    for i in range(3):
        add(f"turns at a joint {i}", turns_at_joint)
        add(f"lateral inflow with a jump {i}", lateral_jump)
    for i in range(4):
        add(f"culvert running full {i}", culvert)
    for kind in ("circular", "egg", "horseshoe", "box"):
        add(f"full throughout, {kind}", full_throughout, kind)
        add(f"full, then free, {kind}", full_to_free, kind)
        add(f"jump to full, {kind}", jump_to_full, kind)
    for kind in ("circular", "egg", "horseshoe"):
        for where in ("between", "below", "above"):
            add(f"two normal depths, {where}, {kind}", two_normal, kind, where)
    return out


def make(name, f, a, k):
    for attempt in range(4000):
        r = random.Random(f"{SERIES}{name}/{attempt}")
        try:
            if f is fixed:
                return f(name, *a, r=r, **k)
            return f(r, name, *a, **k)
        except (Reject, ValueError, ZeroDivisionError) as reason:
            last = reason
            if f is fixed:
                raise
    raise AssertionError(f"{name}: nothing drawn ({last})")


def main():
    global SERIES
    only = sys.argv[1] if len(sys.argv) > 1 else ""
    SERIES = sys.argv[2] if len(sys.argv) > 2 else ""
    print(json.dumps({"about": "Runs of gradually varied flow with their depths, jumps and controls, made by profiles.py; float64 numbers in SI units, gravity 9.80665 m/s2."}))
    count = values = 0
    for name, f, a, k in plan():
        if only not in name:
            continue
        try:
            case = make(name, f, a, k)
        except AssertionError as e:
            print(f"{name}: {e}", file=sys.stderr)
            if not only and not SERIES:
                raise
            continue
        count += 1
        values += len(case["expect"])
        print(json.dumps(case, separators=(",", ":")))
    print(f"{count} runs, {values} depths; largest differences: " + ", ".join(f"{k} {v:.1e}" for k, v in WORST.items()), file=sys.stderr)


if __name__ == "__main__":
    main()
