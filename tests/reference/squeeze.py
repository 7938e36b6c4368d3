"""Writes squeeze.csv: random holding problems, with squeeze, load margin and friction needed worked out by HiGHS.

Libraries: numpy; highspy (HiGHS, tolerances 1e-10, matrix entries above 1e-12 kept). Nothing of the program under test
is used: contact points, cone edges and wrenches are built here from the definition.

Run:  pip install numpy highspy && python3 squeeze.py squeeze.csv      (six minutes of one core; seed 20261202)
Written with numpy 2.4.6, highspy 1.16.0, Python 3.11. The versions of a run and what it reports go to stderr.

Model: finger i at (px, py) from the centre of mass (mm), unit inward normal n, tangent t = (ny, -nx), friction mu, half
width a (0 for a pin). It touches at p + s t at height z, s = +-a, z = +-half_height (one value where that is 0). Cone
edges of unit normal force: n + mu (cos(2 pi j / F) t + sin(2 pi j / F) z), j = 0 .. F-1; in three rows n + mu t and
n - mu t. Wrench (f, r x f) about the centre of mass, N and N mm; rows 3 keeps (fx, fy, mz).

Columns (one line per problem, numbers as Python repr, `-` where there is no value):
  kind      how the problem was made: convex, star (polygons), shared (fingers sharing edges of one), jaws (all on two
            antiparallel faces), disc, triangle, near-K (an even grasp, moved and turned by about 10^-K), edge-K (all mu
            at (1 + 10^-K) of where HiGHS begins to find a squeeze), under-K (1 - 10^-K; a few are held), formula-NAME
            (the answer has a closed form, which is compared here)
  rows      3 or 6
  tool      pin or pad
  drive     adjustable or equal
  F         sides of the friction pyramid, 2 in three rows
  k         number of fingers
  scale half_height      mm; the scale only conditions the torque rows
  then for each finger: px py nx ny mu half_width
  fx fy fz mx my mz      load about the centre of mass, N and N mm, safety factor included
  limit     finger limit, N
  after `=`:
  squeeze   least F: sum of forces' wrenches = -load, each finger's normal force <= F (adjustable) or = F (equal);
            `-` when no F does
  margin    largest c with -c load balanced, each finger's normal force <= limit (adjustable) or all equal and <= limit;
            `-` when only c = 0
  factor    least factor on all mu at which the load is held with F <= limit, by bisection; `-` when none with every mu
            <= 20 does; `?` when not computed (every fifth row has one, and every formula)
  inside    distance from the edge of what F <= 1e5 loads can hold, relative to the load, torques over scale: positive,
            the largest d <= 1 at which every load + d |load| (+-e_j) is held; negative, minus the least 1-norm left
            unbalanced. All kinds but edge, under and formula keep beyond 1e-6 of the edge on the side of their answer:
            this is how "off the edge" is told, together with HiGHS finding a squeeze or none for F without limit
  gap       difference between the answer and what its dual program proves: relative for a squeeze; for `-` that of the
            1-norm left unbalanced, relative to the load
  width     what bisection left of the bracket below factor: 1e-12 (1 + factor), more where HiGHS decides no further

How the answers are confirmed, each time with matrices of our own:
  solutions are worked out anew at the basis HiGHS ends with, and refused when they break a bound by 1e-11
  squeeze   primal by simplex. The dual program by interior point: whatever y it gives, F >= y . b / sum over fingers of
            the finger's largest w . y (0 at least when adjustable), which holds without trusting a solver
  no F      the same bound on the least 1-norm left unbalanced shows that no F <= 1e5 loads does
  margin    its own program; margin * squeeze = limit, since everything scales
  factor    by the margin program (c >= 1); the squeeze program gives F <= limit at 2e-7 (1 + factor) above, not below
  formula   squeeze and factor against the closed form
What differs by more than 1e-9 (relative) stays in the table and is reported. What HiGHS cannot decide is reported and
left out, or drawn again while drawing. In this table: 6 rows with a gap above 1e-9 in squeeze (at most 6e-8; three of
kind near, three edge) and one in `-` (9e-9, near); 34 factors not found or not confirmed, HiGHS being undecided; 2
problems left out (near-9, edge-5); 982 undecided and 6946 too near the edge drawn again. Formulas agree to 3e-11.
"""

import collections
import itertools
import math
import random
import sys
import time

import highspy
import numpy as np

SEED = 20261202
AGREE = 1e-9
APART = 1e-6
INF = highspy.kHighsInf
FAMILIES = ["convex", "star", "shared", "jaws", "disc", "triangle", "near", "jaws"]
PER_CELL = 80
# No divisor in common with the families' turns, so that every family has its share.
FACTOR_EVERY = 5

Finger = collections.namedtuple("Finger", "px py nx ny mu half_width")
Problem = collections.namedtuple("Problem", "rows tool drive sides scale half_height fingers load limit")


# Linear programs


class Undecided(Exception):
    pass


def solver(method, presolve):
    h = highspy.Highs()
    for option, value in [("output_flag", False), ("primal_feasibility_tolerance", 1e-10),
                          ("dual_feasibility_tolerance", 1e-10), ("ipm_optimality_tolerance", 1e-10),
                          ("small_matrix_value", 1e-12), ("threads", 1), ("simplex_iteration_limit", 5000),
                          ("ipm_iteration_limit", 300), ("solver", method), ("presolve", presolve)]:
        assert h.setOptionValue(option, value) == highspy.HighsStatus.kOk, option
    return h


INTERIOR, SIMPLEX, AGAIN = solver("ipm", "off"), solver("simplex", "off"), solver("simplex", "on")
# HiGHS takes no tolerance below 1e-10, and its tolerances are absolute: programs are scaled up, exactly. The lesser
# scales are for what it cannot decide at the first.
SCALES = (1024.0, 32.0, 1.0)
# A squeeze beyond this many loads is a near-degenerate grasp's rounding at work: only the marked rows have one.
MOST = 1e5
COUNTS = collections.Counter()
WORST = collections.defaultdict(float)


def solve(cost, matrix, row_bounds, column_bounds, interior=False):
    """Minimises cost . x. The solution and the objective, or None when infeasible."""
    lp = highspy.HighsLp()
    lp.num_row_, lp.num_col_ = matrix.shape
    column, row = np.nonzero(matrix.T)
    lp.a_matrix_.format_ = highspy.MatrixFormat.kColwise
    lp.a_matrix_.start_ = np.concatenate([[0], np.cumsum(np.count_nonzero(matrix, axis=0))])
    lp.a_matrix_.index_ = row
    lp.a_matrix_.value_ = matrix.T[column, row]
    rows, columns = (np.array(bounds, dtype=float).T for bounds in (row_bounds, column_bounds))
    for up in SCALES:
        lp.col_cost_ = cost * up
        lp.row_lower_, lp.row_upper_ = rows * up
        lp.col_lower_, lp.col_upper_ = columns * up
        for h in [INTERIOR, SIMPLEX, AGAIN] if interior else [SIMPLEX, AGAIN, INTERIOR]:
            h.clearModel()
            h.passModel(lp)
            h.run()
            status = h.getModelStatus()
            # The interior point method says "infeasible" of what it merely cannot do.
            if status == highspy.HighsModelStatus.kInfeasible and h is not INTERIOR:
                return None
            if status == highspy.HighsModelStatus.kOptimal:
                x = vertex(h, matrix, rows, columns, np.array(h.getSolution().col_value) / up)
                # HiGHS calls some bases optimal that break a bound by 1e-8.
                if max(excess(x, columns), excess(matrix @ x, rows)) <= 1e-11 * max(1.0, np.abs(x).max()):
                    return x, float(cost @ x)
            COUNTS["tries at a program in vain"] += 1
    raise Undecided(f"HiGHS ends with {status}")


def excess(x, bounds):
    return float(np.maximum(bounds[0] - x, x - bounds[1]).max())


def vertex(h, matrix, rows, columns, x):
    """The solution at HiGHS' last basis, solved anew: its own may be off by the tolerances. `x` where there is none."""
    basis = h.getBasis()
    if not basis.valid:
        return x
    places = {highspy.HighsBasisStatus.kLower: 0, highspy.HighsBasisStatus.kUpper: 1}
    basic = np.array([status == highspy.HighsBasisStatus.kBasic for status in basis.col_status])
    tight = np.array([status != highspy.HighsBasisStatus.kBasic for status in basis.row_status])
    at = np.array([bounds[places[status]] if status in places else 0.0
                   for status, bounds in zip(basis.col_status, columns.T)])
    at[basic] = 0.0
    wanted = np.array([bounds[places.get(status, 0)] for status, bounds in zip(basis.row_status, rows.T)])[tight]
    square = matrix[tight][:, basic]
    try:
        at[basic] = np.linalg.solve(square, wanted - matrix[tight] @ at)
        off = wanted - (matrix[tight].astype(np.longdouble) @ at)
        at[basic] += np.linalg.solve(square, off.astype(float))
    except np.linalg.LinAlgError:
        return x
    return at


class Balance:
    """Wrenches per finger, torques over the scale, and the wanted sum b = -load / |load|."""

    def __init__(self, problem, factor=1.0):
        self.rows, self.equal = problem.rows, problem.drive == "equal"
        load = np.array(problem.load)
        load[3:] /= problem.scale
        self.unit = float(np.linalg.norm(load))
        self.limit = problem.limit / self.unit
        keep = [0, 1, 5] if self.rows == 3 else range(6)
        self.b = -load[keep] / self.unit
        fingers = [self.wrenches(problem, finger, finger.mu * factor)[keep] for finger in problem.fingers]
        self.w = np.hstack(fingers)
        self.owner = np.repeat(np.arange(len(fingers)), [own.shape[1] for own in fingers])
        self.k, self.n = len(fingers), self.w.shape[1]

    @staticmethod
    def wrenches(problem, finger, mu):
        n, t = np.array([finger.nx, finger.ny, 0.0]), np.array([finger.ny, -finger.nx, 0.0])
        z = np.array([0.0, 0.0, 1.0])
        spread = lambda a: [a, -a] if a > 0 else [0.0]
        turns = [(1.0, 0.0), (-1.0, 0.0)] if problem.rows == 3 else [
            (math.cos(2 * math.pi * j / problem.sides), math.sin(2 * math.pi * j / problem.sides))
            for j in range(problem.sides)]
        # Without friction the edges are one; so many copies of it only trouble the solver.
        turns = turns if mu > 0 else [(0.0, 0.0)]
        columns = []
        for s in spread(finger.half_width):
            for height in spread(problem.half_height):
                r = np.array([finger.px, finger.py, 0.0]) + s * t + height * z
                for c, d in turns:
                    f = n + mu * (c * t + d * z)
                    columns.append(np.concatenate([f, np.cross(r, f) / problem.scale]))
        return np.array(columns).T

    def program(self, extra, extra_bounds, cost, wanted, limit=INF):
        """Columns: weights, F, then `extra` in the balance rows; minimises `cost` over (F, extra)."""
        more = extra.shape[1]
        fingers = np.zeros((self.k, self.n + 1 + more))
        fingers[self.owner, np.arange(self.n)] = 1.0
        fingers[:, self.n] = -1.0
        matrix = np.vstack([np.hstack([self.w, np.zeros((self.rows, 1)), extra]), fingers])
        bounds = [(b, b) for b in wanted] + [(0.0 if self.equal else -INF, 0.0)] * self.k
        columns = [(0.0, INF)] * self.n + [(0.0, limit)] + extra_bounds
        return solve(np.concatenate([np.zeros(self.n), cost]), matrix, bounds, columns)

    def squeeze(self):
        """Least F over |load|, and the weights."""
        found = self.program(np.zeros((self.rows, 0)), [], np.array([1.0]), self.b)
        return found and (found[1], found[0][:self.n])

    def margin(self):
        found = self.program(-self.b[:, None], [(0.0, INF)], np.array([0.0, -1.0]), np.zeros(self.rows), self.limit)
        return -found[1]

    def room(self):
        """Least d over +-e_j, at most 1, up to which b + d e_j is balanced too, by F <= MOST."""
        least = 1.0
        for j in range(self.rows):
            for sign in (1.0, -1.0):
                axis = np.zeros((self.rows, 1))
                axis[j] = -sign
                found = self.program(axis, [(0.0, least)], np.array([0.0, -1.0]), self.b, MOST)
                # At d = 0 it is the squeeze program again: only on the edge can HiGHS find none here.
                least = min(least, -found[1]) if found else 0.0
        return least

    def unbalanced(self):
        """Least 1-norm of W lambda - b with F <= MOST."""
        eye = np.eye(self.rows)
        extra = np.hstack([eye, -eye])
        cost = np.concatenate([[0.0], np.ones(2 * self.rows)])
        return self.program(extra, [(0.0, INF)] * (2 * self.rows), cost, self.b, MOST)[1]

    def inside(self, found):
        return self.room() if found and found[0] < MOST else -self.unbalanced()

    def dual(self, total, y_bound, price=None):
        """Maximises y . b - price u: w . y <= z of its finger, sum z <= total + u, |y_j| <= y_bound; z >= 0 when
        adjustable. No price: no u. The y."""
        own = np.zeros((self.n, self.k))
        own[np.arange(self.n), self.owner] = -1.0
        matrix = np.block([[self.w.T, own, np.zeros((self.n, 1))],
                           [np.zeros((1, self.rows)), np.ones((1, self.k)), -np.ones((1, 1))]])
        columns = [(-y_bound, y_bound)] * self.rows + [(-INF if self.equal else 0.0, INF)] * self.k
        columns.append((0.0, INF if price else 0.0))
        cost = np.concatenate([-self.b, np.zeros(self.k), [price or 0.0]])
        found = solve(cost, matrix, [(-INF, 0.0)] * self.n + [(-INF, total)], columns, interior=True)
        return found[0][:self.rows]

    def squeeze_bound(self):
        """A squeeze over |load| that none is below."""
        top, bottom = self.bound(self.dual(1.0, INF))
        return top / bottom

    def unbalanced_bound(self):
        """What is left unbalanced at least by F <= MOST."""
        top, bottom = self.bound(self.dual(0.0, 1.0, MOST))
        return top - MOST * max(bottom, 0.0)

    def bound(self, y):
        """No F below this holds the load, whatever y is: (y . b, sum over fingers of the largest w . y)."""
        reach = np.full(self.k, -np.inf if self.equal else 0.0)
        np.maximum.at(reach, self.owner, self.w.T @ y)
        return float(y @ self.b), float(reach.sum())


# Answers


class Answer:
    def __init__(self, problem, with_factor, formula=None):
        self.troubles = []
        self.factor, self.width = "?", 0.0
        balance = Balance(problem)
        found = balance.squeeze()
        self.held = found is not None
        self.inside = balance.inside(found)
        if self.held:
            self.confirm_squeeze(balance, problem, *found)
        else:
            self.squeeze = self.margin = None
            self.confirm_none(balance)
        if with_factor:
            self.confirm_factor(problem)
        if formula is not None:
            self.compare("squeeze by formula", self.squeeze, formula[0])
            self.compare("factor by formula", self.factor, formula[1])

    def trouble(self, what, size):
        self.troubles.append(f"{what}: {size:.3g}")

    def compare(self, what, found, expected):
        if found == "?" or (found is None) != (expected is None):
            self.trouble(what + " disagrees on whether there is one", math.nan)
        elif found is not None:
            off = abs(found - expected) / max(abs(expected), 1e-300)
            COUNTS["formulas compared"] += 1
            WORST[what] = max(WORST[what], off)
            if off > AGREE:
                self.trouble(what, off)

    def confirm_squeeze(self, balance, problem, f, weights):
        self.squeeze, self.margin = f * balance.unit, balance.margin()
        residual = float(np.abs(balance.w @ weights - balance.b).max())
        sums = np.bincount(balance.owner, weights, balance.k)
        off = float((np.abs(sums - f) if balance.equal else sums - f).max())
        self.gap = abs(balance.squeeze_bound() - f) / f
        for what, size in [("residual", residual / max(f, 1.0)), ("least weight below 0", float(-weights.min())),
                           ("finger sum over F", off / f), ("squeeze against dual", self.gap),
                           ("margin * squeeze / limit", abs(self.margin * self.squeeze / problem.limit - 1))]:
            WORST[what] = max(WORST[what], size)
            if size > AGREE:
                self.trouble(what, size)

    def confirm_none(self, balance):
        left, least = -self.inside, balance.unbalanced_bound()
        self.gap = abs(least - left)
        WORST["unbalanced against dual"] = max(WORST["unbalanced against dual"], self.gap)
        if self.gap > AGREE:
            self.trouble("unbalanced against dual", self.gap)
        if least <= 0:
            raise Undecided(f"HiGHS finds no squeeze, but nothing proves it ({least})")
        margin = balance.margin()
        WORST["margin where none is held"] = max(WORST["margin where none is held"], margin)
        if margin > AGREE:
            self.trouble("margin where none is held", margin)

    def confirm_factor(self, problem):
        def held(factor):
            balance = Balance(problem, factor)
            found = balance.squeeze()
            return found is not None and found[0] <= balance.limit

        try:
            self.factor, self.width = least_factor(problem, lambda balance: balance.margin() >= 1)
            if self.factor is None:
                wrong = held(most_factor(problem))
            else:
                step = 2e-7 * (1 + self.factor)
                wrong = not held(self.factor + step) or self.factor > step and held(self.factor - step)
        except Undecided as undecided:
            self.troubles.append(f"factor: {undecided}")
            return
        COUNTS["factors confirmed"] += not wrong
        if wrong:
            self.trouble("factor against squeeze", self.factor or math.nan)


def most_factor(problem):
    largest = max(finger.mu for finger in problem.fingers)
    return 20.0 / largest if largest > 0 else 0.0


def least_factor(problem, test):
    """Least factor on all mu, none of them above 20, whose balance passes the test, and how far it may be below that;
    None when there is none."""
    held = lambda factor: test(Balance(problem, factor))
    if held(0.0):
        return 0.0, 0.0
    low, high = 0.0, most_factor(problem)
    if not held(high):
        return None, 0.0
    while high - low > 1e-12 * (1 + high):
        # So near the answer HiGHS may not decide at some factor, and still at the next.
        for share in (0.5, 0.3, 0.7):
            middle = low + share * (high - low)
            try:
                passed = held(middle)
            except Undecided:
                continue
            low, high = (low, middle) if passed else (middle, high)
            break
        else:
            if high - low <= 1e-7 * (1 + high):
                break
            raise Undecided(f"factor between {low} and {high}")
    return high, high - low


# Random problems


def ring(rng, star):
    """A polygon, counter-clockwise, about its centroid."""
    count = rng.randint(3, 9)
    a, b = rng.uniform(15, 90), rng.uniform(10, 60)
    while True:
        angles = sorted(rng.uniform(0, 2 * math.pi) for _ in range(count))
        steps = [(v - u) % (2 * math.pi) for u, v in zip(angles, angles[1:] + angles[:1])]
        if min(steps) > 0.15 and max(steps) < 2.8:
            break
    reach = [rng.uniform(0.35, 1.0) if star else 1.0 for _ in angles]
    points = [(a * q * math.cos(t), b * q * math.sin(t)) for t, q in zip(angles, reach)]
    cross = [p[0] * q[1] - q[0] * p[1] for p, q in zip(points, points[1:] + points[:1])]
    sums = [[p[i] + q[i] for p, q in zip(points, points[1:] + points[:1])] for i in (0, 1)]
    cx, cy = (sum(c * s for c, s in zip(cross, own)) / (3 * sum(cross)) for own in sums)
    return [(x - cx, y - cy) for x, y in points]


def on_edges(rng, points, k, most_edges):
    """k places on edges of the ring (at most `most_edges` of them), with inward normals; the reach of the ring."""
    edges = list(zip(points, points[1:] + points[:1]))
    lengths = [math.dist(*edge) for edge in edges]
    chosen = rng.choices(edges, lengths, k=most_edges)
    places = []
    for i in range(k):
        (ax, ay), (bx, by) = chosen[i % most_edges]
        u = rng.uniform(0.08, 0.92)
        length = math.hypot(bx - ax, by - ay)
        places.append((ax + u * (bx - ax), ay + u * (by - ay), -(by - ay) / length, (bx - ax) / length))
    return places, max(math.hypot(*p) for p in points)


def between_jaws(rng, k):
    angle = rng.choice([0.0, math.pi / 2, rng.uniform(0, 2 * math.pi)])
    nx, ny = math.cos(angle), math.sin(angle)
    half, off = rng.uniform(5, 50), rng.choice([0.0, rng.uniform(-30, 30)])
    side = rng.choice([0.0, rng.uniform(-25, 25)])
    along = rng.uniform(0, 40)
    places = []
    for i in range(k):
        s = 1 if i == 0 else -1 if i == 1 else rng.choice([1, -1])
        lateral = side + (0.0 if k == 2 and rng.random() < 0.7 else rng.uniform(-along, along))
        across = off - s * half
        places.append((across * nx + lateral * ny, across * ny - lateral * nx, s * nx, s * ny))
    return places, math.hypot(half + abs(off), along + abs(side)) + 1.0


def evenly(rng, k):
    """k places round a disc, or mid-edges of a regular polygon."""
    r, start = rng.uniform(8, 70), rng.choice([0.0, rng.uniform(0, 2 * math.pi)])
    turns = [start + 2 * math.pi * i / k for i in range(k)]
    return [(r * math.cos(t), r * math.sin(t), -math.cos(t), -math.sin(t)) for t in turns], r


def on_disc(rng, k):
    r = rng.uniform(8, 70)
    turns = [rng.uniform(0, 2 * math.pi) for _ in range(k)]
    return [(r * math.cos(t), r * math.sin(t), -math.cos(t), -math.sin(t)) for t in turns], r


def on_triangle(rng, k):
    r, start = rng.uniform(8, 40), rng.choice([-math.pi / 2, rng.uniform(0, 2 * math.pi)])
    moved = rng.choice([0.0, rng.uniform(0, 1.5) * r])
    places = []
    for i in range(k):
        t = start + 2 * math.pi * (i % 3) / 3
        s = rng.choice([moved, rng.uniform(-moved, moved)]) + (i // 3) * 0.3 * r
        nx, ny = -math.cos(t), -math.sin(t)
        places.append((-r * nx + s * ny, -r * ny - s * nx, nx, ny))
    return places, 2 * r


def moved(rng, places, size):
    out = []
    for px, py, nx, ny in places:
        turn = math.atan2(ny, nx) + rng.uniform(-1, 1) * size
        out.append((px + rng.uniform(-10, 10) * size, py + rng.uniform(-10, 10) * size, math.cos(turn), math.sin(turn)))
    return out


def frictions(rng, k):
    low, high = rng.choice([(0.02, 0.3), (0.1, 0.6), (0.3, 1.5)])
    common = round(rng.uniform(low, high), 4)
    style = rng.choice(["one", "one", "mixed", "some", "none"] if rng.random() < 0.5 else ["one", "mixed"])
    if style == "mixed":
        return [round(rng.uniform(low, high), 4) for _ in range(k)]
    if style == "some":
        return [rng.choice([0.0, common]) for _ in range(k)]
    return [0.0 if style == "none" else common] * k


def random_load(rng, rows, scale):
    size = round(10 ** rng.uniform(-1, 2.3), 3)
    safety = rng.choice([1.0, 1.5, 2.0])
    angle = rng.choice([0.0, -math.pi / 2, rng.uniform(0, 2 * math.pi)])
    flat = np.array([math.cos(angle), math.sin(angle), 0.0])
    at = np.array([rng.uniform(-1, 1) * scale, rng.uniform(-1, 1) * scale, 0.0])
    style = rng.choice(["plane", "turn", "off", "both"] if rows == 3 else
                       ["lying", "lying", "plane", "tilted", "turn", "off", "both"])
    f, m = np.zeros(3), np.zeros(3)
    if style == "lying":
        f = np.array([0.0, 0.0, -1.0])
    elif style == "plane":
        f = flat
    elif style == "tilted":
        tilt = rng.uniform(0.05, 1.5)
        f = math.sin(tilt) * flat + np.array([0.0, 0.0, -math.cos(tilt)])
    elif style == "turn":
        m = np.array([0.0, 0.0, rng.choice([-1, 1]) * scale * rng.uniform(0.1, 1)])
    else:
        f = flat.copy() if rows == 3 else flat * rng.random() + np.array([0.0, 0.0, rng.uniform(-1, 0.3)])
        m = np.cross(at * rng.uniform(0.02, 1), f)
        if style == "both":
            m += np.array([0.0, 0.0, scale * rng.uniform(-0.5, 0.5)])
            f = f + (np.zeros(3) if rows == 3 else np.array([0.0, 0.0, -1.0]))
    load = size * safety * np.concatenate([f, m])
    return [round(float(x), 6) + 0.0 for x in load], size


def draw(rng, family, rows, tool, drive, k):
    kind = family
    if family in ("convex", "star"):
        places, scale = on_edges(rng, ring(rng, family == "star"), k, k)
    elif family == "shared":
        places, scale = on_edges(rng, ring(rng, rng.random() < 0.4), k, rng.randint(1, max(1, k - 1)))
    elif family == "jaws":
        places, scale = between_jaws(rng, k)
    elif family == "disc":
        places, scale = on_disc(rng, k)
    elif family == "triangle":
        places, scale = on_triangle(rng, k)
    else:
        digits = rng.randint(3, 9)
        places, scale = evenly(rng, k)
        places, kind = moved(rng, places, 10.0**-digits), f"near-{digits}"
    wide = rng.choice([(0.01, 0.5), (1.0, 10.0), (5.0, 30.0)])
    width = lambda: round(rng.uniform(*wide), 3) if tool == "pad" else 0.0
    common = width()
    same = rng.random() < 0.7
    # A millionth of a mm does for a place picked at random and keeps the table small; a near-even one needs all digits.
    exact = (lambda x: x + 0.0) if family == "near" else (lambda x: round(x, 6) + 0.0)
    fingers = [Finger(exact(px), exact(py), nx + 0.0, ny + 0.0, mu, common if same else width())
               for (px, py, nx, ny), mu in zip(places, frictions(rng, k))]
    half_height = 0.0 if rows == 3 else rng.choice([0.5, 2.0, 5.0, round(rng.uniform(0.2, 20), 3)])
    load, size = random_load(rng, rows, scale)
    sides = 2 if rows == 3 else rng.choice([4, 6, 8, 8, 12])
    limit = round(size * 10 ** rng.uniform(-0.2, 1.5), 3)
    return kind, Problem(rows, tool, drive, sides, round(scale, 6), half_height, fingers, load, limit)


def cells():
    return [(rows, drive) for rows in (3, 6) for drive in ("adjustable", "equal")]


def random_problems(rng):
    for rows, drive in cells():
        for k in range(2, 7):
            for wanted in (True, False):
                for i in range(PER_CELL):
                    yield one_of(rng, i, rows, drive, k, wanted)


def one_of(rng, i, rows, drive, k, wanted):
    """A problem of the family whose turn it is (another when that gives none), held or not as wanted, off the edge."""
    for attempt in range(100000):
        family = FAMILIES[(i + attempt // 300) % len(FAMILIES)]
        kind, problem = draw(rng, family, rows, ("pin", "pad")[(i // len(FAMILIES)) % 2], drive, k)
        try:
            balance = Balance(problem)
            found = balance.squeeze()
            if (found is not None) != wanted:
                continue
            inside = balance.inside(found)
        except Undecided:
            COUNTS["undecided by HiGHS, drawn again"] += 1
            continue
        if (inside if wanted else -inside) <= APART:
            COUNTS["too near the edge, drawn again"] += 1
            continue
        COUNTS["family exhausted"] += attempt >= 300
        return kind, problem
    raise RuntimeError("no such problem")


def scaled(problem, factor):
    return problem._replace(fingers=[finger._replace(mu=finger.mu * factor) for finger in problem.fingers])


def edge_problems(rng):
    for rows, drive in cells():
        made = 0
        while made < 5:
            _, problem = draw(rng, rng.choice(FAMILIES), rows, rng.choice(["pin", "pad"]), drive, rng.randint(2, 6))
            try:
                factor, width = least_factor(problem, lambda balance: balance.squeeze() is not None)
            except Undecided:
                continue
            if factor is None or not 0.05 < factor < 6.0 or width > 1e-9:
                continue
            made += 1
            for digits in (3, 5, 7):
                yield f"edge-{digits}", scaled(problem, factor * (1 + 10.0**-digits))
                yield f"under-{digits}", scaled(problem, factor * (1 - 10.0**-digits))


# Problems with a closed form: (name, problem, (squeeze, factor))


def turned(fingers, load, angle):
    """Quarter turns exactly, others to rounding."""
    c, s = {0: (1.0, 0.0), 1: (0.0, 1.0), 2: (-1.0, 0.0), 3: (0.0, -1.0)}.get(angle, (math.cos(angle), math.sin(angle)))
    spin = lambda x, y: (c * x - s * y + 0.0, s * x + c * y + 0.0)
    fingers = [Finger(*spin(f.px, f.py), *spin(f.nx, f.ny), f.mu, f.half_width) for f in fingers]
    return fingers, [*spin(load[0], load[1]), load[2], *spin(load[3], load[4]), load[5]]


def set_up(rng, fingers, load, limit, rows, drive, turn, sides=None, half_height=None):
    fingers, load = turned(fingers, load, turn)
    scale = round(max(math.hypot(f.px, f.py) for f in fingers), 6)
    tool = "pad" if any(f.half_width > 0 for f in fingers) else "pin"
    if rows == 3:
        sides, half_height = 2, 0.0
    sides = sides or rng.choice([4, 6, 8, 12])
    half_height = rng.choice([1.0, 4.0]) if half_height is None else half_height
    return Problem(rows, tool, drive, sides, scale, half_height, fingers, load, limit)


def facing(a, q, mu, b=0.0, y=0.0):
    """Two fingers facing each other across 2a along x, mid-span at -q, centre of mass y off their line."""
    return [Finger(-a - q, -y, 1.0, 0.0, mu, b), Finger(a - q, -y, -1.0, 0.0, mu, b)]


def opposed(rng):
    """Weight w along the faces, centre of mass q from mid-span: F = w / (2 mu) (1 + |q| / a); pads of half width b:
    max(w / (2 mu), w (a + |q|) / (2 (mu a + b))). A force along the axis cannot be held by equal fingers. (statics)"""
    for m, mu, share, b in [(2, 0.15, 0.0, 0.0), (2, 0.15, 0.4, 0.0), (5, 0.2, 1.0, 0.0), (2, 0.15, 0.4, 2.0),
                            (2, 0.15, 0.4, 20.0), (0.7, 0.6, -0.8, 3.0), (1.3, 0.05, -1.7, 0.0), (0.3, 1.2, 0.25, 0.1)]:
        a, w = 30.0, m * 9.81
        q, limit = share * a, 6 * w
        f = w / (2 * mu) * (1 + abs(share))
        needed = w / (2 * limit) * (1 + abs(share))
        if b > 0:
            f = max(w / (2 * mu), w * (a + abs(q)) / (2 * (mu * a + b)))
            needed = max(w / (2 * limit), (w * (a + abs(q)) / (2 * limit) - b) / a)
        for rows, drive in cells():
            turn = rng.choice([0, 1, 2, 3, rng.uniform(0, 6)])
            sign = rng.choice([1, -1])
            load = [0.0, sign * w, 0.0, 0.0, 0.0, 0.0]
            yield "opposed", set_up(rng, facing(a, q, mu, b), load, limit, rows, drive, turn), (f, needed / mu)
    for drive in ("adjustable", "equal"):
        for rows in (3, 6):
            answer = (12.0, 0.0) if drive == "adjustable" else (None, None)
            problem = set_up(rng, facing(25.0, 0.0, 0.3), [12.0, 0, 0, 0, 0, 0], 40.0, rows, drive, 1)
            yield "axial", problem, answer


def plate(rng):
    """L-shaped plate, 0.628 kg, pins facing each other across 40 mm; any load (fx, fy, mz) on two facing pins:
    tangential t1 + t2 = -fx, t1 - t2 from the torques, n1 - n2 = -fy, n >= |t| / mu. (statics)"""
    lower, upper, w = (36.0, -44.0), (36.0, -4.0), 0.628 * 9.81

    def least(mu, fx, fy, mz):
        a = (upper[1] - lower[1]) / 2
        middle = (lower[1] + upper[1]) / 2
        difference = (lower[0] * fy - middle * fx - mz) / a
        t1, t2 = (-fx + difference) / 2, (-fx - difference) / 2
        n2 = max(abs(t2) / mu, abs(t1) / mu + fy, 0.0, fy)
        return max(n2, n2 - fy), t1, t2

    # Worked out by hand to six digits (statics).
    known = {(-w, 0.0): 27.106992, (0.0, -w): 28.339128, (-12.56, -w): 83.603128, (12.56, -w): 39.246232}
    loads = [(-w, 0.0, 0.0), (0.0, -w, 0.0), (-12.56, -w, 0.0), (12.56, -w, 0.0), (w, 0.0, 0.0), (0.0, w, 0.0),
             (0.0, 0.0, 150.0), (0.0, 0.0, -150.0), (-3.0, 2.0, 90.0), (-3.0, 2.0, -90.0)]
    for mu in (0.25, 0.4):
        fingers = [Finger(*lower, 0.0, 1.0, mu, 0.0), Finger(*upper, 0.0, -1.0, mu, 0.0)]
        for fx, fy, mz in loads:
            f, t1, t2 = least(mu, fx, fy, mz)
            if mu == 0.25 and (fx, fy) in known and mz == 0.0:
                assert abs(f - known[fx, fy]) < 1e-6
            # At the limit the finger with less normal force has limit - |fy|.
            n1, n2 = 60.0 - max(fy, 0.0), 60.0 - max(-fy, 0.0)
            needed = max(abs(t1) / n1, abs(t2) / n2) / mu
            for rows, drive in cells():
                answer = (f, needed) if drive == "adjustable" or fy == 0.0 else (None, None)
                turn = rng.choice([0, 1, 2, 3])
                yield "plate", set_up(rng, fingers, [fx, fy, 0, 0, 0, mz], 60.0, rows, drive, turn), answer


def upright(sides):
    """How much of mu a pyramid has straight up: all at an edge (F a multiple of 4), less midway between two edges."""
    return 1.0 if sides % 4 == 0 else math.cos(math.pi / sides)


def shared_weight(rng):
    """A flat part lying, three points round a circle: finger i carries w lambda_i by friction, lambda the barycentric
    coordinates of the centre of mass, so F = w max |lambda_i| / mu; equal normals balance. (statics)"""
    spots = [(0.0, 0.0), (0.3, 0.1), (-0.4, 0.2), (0.0, 0.55), (0.9, -0.3), (-1.2, 0.4)]
    for at, sides, drive in itertools.product(spots, (4, 6, 8, 12), ("adjustable", "equal")):
        r, mu, w = 40.0, rng.choice([0.15, 0.4, 0.8]), rng.choice([2.0, 9.81])
        turns = [2 * math.pi * i / 3 for i in range(3)]
        corners = [(math.cos(t), math.sin(t)) for t in turns]
        shares = [(1 + 2 * (x * at[0] + y * at[1])) / 3 for x, y in corners]
        fingers = [Finger(r * (x - at[0]), r * (y - at[1]), -x, -y, mu, 0.0) for x, y in corners]
        most, limit = w * max(map(abs, shares)) / upright(sides), 5 * w
        problem = set_up(rng, fingers, [0, 0, -w, 0, 0, 0], limit, 6, drive, rng.uniform(0, 6), sides, 0.0)
        yield "three", problem, (most / mu, most / limit / mu)


def lying_between_two(rng):
    """A flat part lying, between two points: F = w / (2 mu) (1 + |q| / a), none with the centre of mass off their
    line. Between two pads of half width b, it y off the middle: F = w / (2 mu) max(1, |y| / b). (statics)"""
    for drive in ("adjustable", "equal"):
        for sides in (4, 6, 8, 12):
            for q, b, y in [(0.0, 0.0, 0.0), (12.0, 0.0, 0.0), (-45.0, 0.0, 0.0), (0.0, 0.0, 0.01), (12.0, 0.0, -5.0),
                            (0.0, 8.0, 0.0), (12.0, 8.0, 0.0), (0.0, 8.0, 5.0), (0.0, 8.0, -8.0), (0.0, 8.0, 20.0),
                            (0.0, 0.05, 0.04)]:
                a = 30.0
                mu, w = rng.choice([0.15, 0.4, 0.8]), rng.choice([2.0, 9.81])
                limit = 20 * w
                most = w / 2 * max(1 + abs(q) / a, abs(y) / b if b > 0 else 0.0) / upright(sides)
                answer = (most / mu, most / limit / mu) if b > 0 or y == 0.0 else (None, None)
                fingers, load, turn = facing(a, q, mu, b, y), [0, 0, -w, 0, 0, 0], rng.randint(0, 3)
                yield "pair", set_up(rng, fingers, load, limit, 6, drive, turn, sides, 0.0), answer


def even_torque(rng):
    """k pins evenly round a circle of radius r, torque m about the axis: F = m / (k mu r). (statics)"""
    for k in range(2, 7):
        for rows, drive in cells():
            r, mu, m = 25.0, rng.choice([0.1, 0.5, 1.1]), rng.choice([-60.0, 140.0])
            turns = [2 * math.pi * i / k for i in range(k)]
            fingers = [Finger(r * math.cos(t), r * math.sin(t), -math.cos(t), -math.sin(t), mu, 0.0) for t in turns]
            f = abs(m) / (k * mu * r)
            problem = set_up(rng, fingers, [0, 0, 0, 0, 0, m], 20.0, rows, drive, rng.uniform(0, 6))
            yield "torque", problem, (f, f / 20.0)


def pinwheel(rng):
    """Four pins without friction, offsets e1 and e2 on a square: one pair turns by 2 e1, the other back by 2 e2. Torque
    m: F = m / (2 e1) adjustable, m / (2 (e1 - e2)) equal, which needs e1 > e2. (statics)"""
    for e1, e2 in [(5.0, 5.0), (10.0, 5.0), (5.0, 10.0), (4.0, 1.5)]:
        for sign in (1.0, -1.0):
            for drive in ("adjustable", "equal"):
                a, m = 20.0, 50.0
                arm = (e1 if sign > 0 else e2) if drive == "adjustable" else sign * (e1 - e2)
                answer = (m / (2 * arm), 0.0) if arm > 0 else (None, None)
                fingers = [Finger(-a, e1, 1.0, 0.0, 0.0, 0.0), Finger(a, -e1, -1.0, 0.0, 0.0, 0.0),
                           Finger(e2, -a, 0.0, 1.0, 0.0, 0.0), Finger(-e2, a, 0.0, -1.0, 0.0, 0.0)]
                problem = set_up(rng, fingers, [0, 0, 0, 0, 0, sign * m], 40.0, 3, drive, rng.randint(0, 3))
                yield "pinwheel", problem, answer


def formula_problems(rng):
    for family in (opposed, plate, shared_weight, lying_between_two, even_torque, pinwheel):
        for name, problem, answer in family(rng):
            yield f"formula-{name}", problem, answer


# The table


def text(x):
    return x if x == "?" else "-" if x is None else repr(float(x))


def line(kind, problem, answer):
    p = problem
    numbers = [p.scale, p.half_height, *[x for finger in p.fingers for x in finger], *p.load, p.limit]
    given = [kind, str(p.rows), p.tool, p.drive, str(p.sides), str(len(p.fingers)), *[repr(float(x)) for x in numbers]]
    rough = [f"{answer.inside:.3e}", f"{answer.gap:.1e}", f"{answer.width:.1e}"]
    found = [*map(text, (answer.squeeze, answer.margin, answer.factor)), *rough]
    return ",".join(given) + "=" + ",".join(found)


def problems():
    for number, (kind, problem) in enumerate(random_problems(random.Random(SEED))):
        yield kind, problem, number % FACTOR_EVERY == 0, None
    for number, (kind, problem) in enumerate(edge_problems(random.Random(SEED + 1))):
        yield kind, problem, number % FACTOR_EVERY == 0, None
    for kind, problem, answer in formula_problems(random.Random(SEED + 2)):
        yield kind, problem, True, answer


def main(path):
    print("numpy", np.__version__, "highspy", highspy.Highs().version(), "Python", sys.version.split()[0], "seed", SEED,
          file=sys.stderr)
    with open(path, "w") as out:
        number = 0
        for kind, problem, with_factor, formula in problems():
            try:
                answer = Answer(problem, with_factor, formula)
            except Undecided as undecided:
                print(f"left out, {kind}: {undecided}: {problem}", file=sys.stderr)
                COUNTS["left out"] += 1
                continue
            print(line(kind, problem, answer), file=out)
            number += 1
            COUNTS[problem.rows, problem.drive, "held" if answer.held else "not held"] += 1
            for trouble in answer.troubles:
                print(f"line {number} {kind}: {trouble}", file=sys.stderr)
                COUNTS["reported"] += 1
            if not kind.startswith(("edge", "under", "formula")):
                assert abs(answer.inside) > APART
    for what, count in COUNTS.items():
        print(what, count, file=sys.stderr)
    for what, size in WORST.items():
        print(f"worst {what}: {size:.3g}", file=sys.stderr)
    print(f"{number} problems in {time.process_time():.0f} s of one core", file=sys.stderr)


if __name__ == "__main__":
    main(sys.argv[1])
