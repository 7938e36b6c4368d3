"""Writes grasps.csv: random planar grasps with every score worked out by outside libraries.

Libraries: numpy; scipy.spatial.ConvexHull (Qhull) for hulls; highspy (HiGHS) and scipy.optimize.linprog for the linear
programs. Nothing of the program under test is used: generators are built here from the definition.

Run:  pip install numpy scipy highspy && python3 grasps.py grasps.csv      (about a minute; seed 20261201)
Written with numpy 2.4.6, scipy 1.17.1, highspy 1.16.0, Python 3.11. The versions of a run are printed to stderr.

Model: contact i at (px, py) with unit inward normal n, tangent t = (ny, -nx), friction mu; torque point (ax, ay), torque
scale l. Generators w = (f, ((p - a) x f) / l) for f = n + mu t and f = n - mu t (one generator where mu = 0).

Columns (one line per grasp, numbers as Python repr, `-` where there is no value):
  kind      how the grasp was made: free, parallel, mixed, edge-K (mu = needed (1 + 10^-K)), under-K (1 - 10^-K)
  k         number of contacts
  ax ay l   torque point, torque scale
  then for each contact: px py nx ny mu
  after `=`:
  d         max d: W lambda = 0, sum lambda = 1, lambda_i >= d (HiGHS); `-` when infeasible with d >= 0
  rank      rank of W (numpy, singular values above 1e-9 of the largest)
  signed    least distance from 0 to a facet's plane of conv{w} (Qhull), negative when 0 is outside; `-` when the hull is flat
  quality   max(signed, 0)
  finger    the same in the Minkowski sum over fingers of conv{0, the finger's generators}: hull of all sums (Qhull)
  up, down  largest pure torque over l with sum lambda = 1, counter-clockwise and clockwise (two linear programs by
            scipy.optimize.linprog); `-` when infeasible
  needed    least factor on all mu at which 0 is inside the hull of the generators scaled to unit force (bisection on
            Qhull facet offsets to a bracket of 1e-12 (1 + needed); good to about 1e-9, less where the hull is flat there);
            `-` when no factor up to 50 / largest mu does
"""

import itertools
import math
import random
import sys

import highspy
import numpy as np
import scipy
from scipy.optimize import linprog
from scipy.spatial import ConvexHull, QhullError

SEED = 20261201


def generators(grasp, factor=1.0, unit=False):
    a, l = np.array(grasp["about"]), grasp["scale"]
    fingers = []
    for px, py, nx, ny, mu in grasp["contacts"]:
        mu = mu * factor
        own = []
        for m in [mu, -mu] if mu > 0 else [0.0]:
            fx, fy = nx + m * ny, ny - m * nx
            w = np.array([fx, fy, ((px - a[0]) * fy - (py - a[1]) * fx) / l])
            own.append(w / math.hypot(fx, fy) if unit else w)
        fingers.append(own)
    return fingers


def facet_distance(points):
    """Least distance from 0 to a facet's plane, negative outside; None for a flat hull."""
    points = np.array(points)
    if len(points) < 4:
        return None
    try:
        hull = ConvexHull(points)
    except QhullError:
        return None
    return float((-hull.equations[:, -1]).min())


def highs_balance(w):
    """max d, W lambda = 0, sum lambda = 1, lambda >= d, d >= 0, in rows; None when infeasible."""
    n = len(w)
    h = highspy.Highs()
    h.setOptionValue("output_flag", False)
    h.setOptionValue("primal_feasibility_tolerance", 1e-10)
    h.setOptionValue("dual_feasibility_tolerance", 1e-10)
    inf = highspy.kHighsInf
    for i in range(n):
        h.addVar(0.0, inf)
    h.addVar(0.0, inf)
    h.changeColCost(n, -1.0)
    index = np.arange(n, dtype=np.int32)
    for row in range(3):
        h.addRow(0.0, 0.0, n, index, np.array([x[row] for x in w]))
    h.addRow(1.0, 1.0, n, index, np.ones(n))
    for i in range(n):
        h.addRow(0.0, inf, 2, np.array([i, n], dtype=np.int32), np.array([1.0, -1.0]))
    h.run()
    if h.getModelStatus() != highspy.HighsModelStatus.kOptimal:
        return None
    return h.getSolution().col_value[n]


def pure_torque(w, sense):
    w = np.array(w)
    a_eq = np.vstack([w[:, 0], w[:, 1], np.ones(len(w))])
    r = linprog(-sense * w[:, 2], A_eq=a_eq, b_eq=[0, 0, 1], method="highs-ds",
                options={"primal_feasibility_tolerance": 1e-10, "dual_feasibility_tolerance": 1e-10})
    return float(-r.fun) if r.status == 0 else None


def per_finger(fingers):
    sums = [sum(pick) for pick in itertools.product(*[[np.zeros(3)] + own for own in fingers])]
    d = facet_distance(sums)
    return max(d, 0.0) if d is not None else 0.0


def closed_at(grasp, factor):
    d = facet_distance([w for own in generators(grasp, factor, unit=True) for w in own])
    return d is not None and d > 1e-13


def needed(grasp):
    largest = max(c[4] for c in grasp["contacts"])
    if closed_at(grasp, 0.0):
        return 0.0
    if largest <= 0.0:
        return None
    low, high = 0.0, 50.0 / largest
    if not closed_at(grasp, high):
        return None
    while high - low > 1e-12 * (1.0 + high):
        middle = (low + high) / 2
        if closed_at(grasp, middle):
            high = middle
        else:
            low = middle
    return high


def make(rng, k, kind):
    """A grasp on no particular part: contacts about an ellipse, pressing inward more or less."""
    a, b = rng.uniform(15, 60), rng.uniform(8, 40)
    mu = rng.choice([0.1, 0.2, 0.35, 0.6, rng.uniform(0.05, 1.0)])
    contacts = []
    base = rng.uniform(0, 2 * math.pi)
    for _ in range(k):
        at = rng.uniform(0, 2 * math.pi)
        px, py = a * math.cos(at), b * math.sin(at)
        if kind == "parallel":
            angle = base + rng.choice([0.0, math.pi, math.pi, math.pi / 2, -math.pi / 2])
        else:
            angle = math.atan2(-py / b**2, -px / a**2) + rng.choice([rng.uniform(-0.3, 0.3), rng.uniform(-1.2, 1.2)])
        own = rng.choice([0.0, mu, 0.5 * mu, rng.uniform(0.02, 0.9)]) if kind == "mixed" else mu
        contacts.append((px, py, math.cos(angle), math.sin(angle), own))
    return {"about": (rng.uniform(-8, 8), rng.uniform(-5, 5)), "scale": rng.uniform(10, 70), "contacts": contacts}


def scaled(grasp, factor):
    contacts = [(px, py, nx, ny, mu * factor) for px, py, nx, ny, mu in grasp["contacts"]]
    return {**grasp, "contacts": contacts}


def cases(rng):
    for k in range(2, 7):
        for kind, count in [("free", 150), ("parallel", 90), ("mixed", 100)]:
            for _ in range(count):
                yield kind, make(rng, k, kind)
        made = 0
        while made < 14:
            grasp = make(rng, k, rng.choice(["free", "parallel", "mixed"]))
            factor = needed(grasp)
            if factor is None or not 0.02 < factor < 8.0:
                continue
            made += 1
            for digits in range(2, 9):
                yield f"edge-{digits}", scaled(grasp, factor * (1 + 10.0**-digits))
                yield f"under-{digits}", scaled(grasp, factor * (1 - 10.0**-digits))


def text(x):
    return "-" if x is None else repr(x)


def line(kind, grasp):
    fingers = generators(grasp)
    w = [g for own in fingers for g in own]
    signed = facet_distance(w)
    rank = int(np.linalg.matrix_rank(np.array(w), tol=1e-9 * np.linalg.norm(np.array(w), 2)))
    given = [*grasp["about"], grasp["scale"], *[x for contact in grasp["contacts"] for x in contact]]
    quality = max(signed, 0.0) if signed is not None else 0.0
    found = [text(highs_balance(w)), str(rank), text(signed), text(quality), text(per_finger(fingers)),
             text(pure_torque(w, 1.0)), text(pure_torque(w, -1.0)), text(needed(grasp))]
    return f"{kind},{len(fingers)}," + ",".join(map(repr, given)) + "=" + ",".join(found)


if __name__ == "__main__":
    print("numpy", np.__version__, "scipy", scipy.__version__, "highspy", highspy.Highs().version(), "seed", SEED,
          file=sys.stderr)
    with open(sys.argv[1], "w") as out:
        for kind, grasp in cases(random.Random(SEED)):
            print(line(kind, grasp), file=out)
