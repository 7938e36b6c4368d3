"""Writes degenerate.csv: nearly degenerate planar grasps with their signed quality in exact rational arithmetic.

Every float is a rational number, so the wrench hull of a set of generators given in floats can be worked out without
any rounding: the planes through all triples of generators, both sides, the least reach over their unit normals. Only
the length of a normal is irrational; it is taken to 50 digits. Python's standard library alone (fractions, decimal).

Run:  python3 degenerate.py > degenerate.csv      (a few minutes; seeded, so the file comes out the same)

Columns: mu, then px py nx ny for each contact (torque point 0, torque scale 1), then after '=' the least reach over the
normals of all nondegenerate triples (above 0 iff closed, and then the quality), to 17 digits.
"""

import math
import random
from decimal import Decimal, getcontext
from fractions import Fraction

getcontext().prec = 60


def generators(contacts, mu):
    """Generators in floats, by the same formulas as the program."""
    columns = []
    for px, py, nx, ny in contacts:
        tx, ty = ny, -nx
        normal_torque = px * ny - py * nx
        tangent_torque = px * ty - py * tx
        for m in [mu, -mu] if mu > 0 else [0.0]:
            columns.append((nx + tx * m, ny + ty * m, normal_torque + m * tangent_torque))
    return columns


def root(x):
    return (Decimal(x.numerator) / Decimal(x.denominator)).sqrt()


def exact(columns):
    w = [tuple(Fraction(x) for x in column) for column in columns]
    least = None
    for i in range(len(w)):
        for j in range(i + 1, len(w)):
            a = [w[j][r] - w[i][r] for r in range(3)]
            for k in range(j + 1, len(w)):
                b = [w[k][r] - w[i][r] for r in range(3)]
                n = (a[1] * b[2] - a[2] * b[1], a[2] * b[0] - a[0] * b[2], a[0] * b[1] - a[1] * b[0])
                square = n[0] * n[0] + n[1] * n[1] + n[2] * n[2]
                if square == 0:
                    continue
                reach = [n[0] * v[0] + n[1] * v[1] + n[2] * v[2] for v in w]
                for value in (max(reach), -min(reach)):
                    distance = Decimal(value.numerator) / Decimal(value.denominator) / root(square)
                    least = distance if least is None else min(least, distance)
    return least


def unit(angle):
    return math.cos(angle), math.sin(angle)


def cases(random):
    for _ in range(40):
        for nearly in [0.0, 1e-15, 1e-13, 1e-12, 1e-11, 1e-10, 1e-9, 1e-8, 1e-6, 1e-4]:
            k = random.choice([3, 4, 4, 5])
            mu = random.choice([0.0, 1e-9, 1e-6, 0.05, 0.2, 0.2, 0.5])
            base = random.uniform(0, 2 * math.pi)
            contacts = []
            for finger in range(k):
                # Few directions, each off by a hair: parallel edges, facing edges, several fingers on one edge.
                turn = random.choice([0.0, math.pi, math.pi, 2 * math.pi / 3, -2 * math.pi / 3, math.pi / 2])
                nx, ny = unit(base + turn + nearly * random.choice([-1, 0, 1, 2]))
                if contacts and random.random() < 0.25:
                    px, py = contacts[-1][0] + nearly * random.uniform(-1, 1), contacts[-1][1]
                else:
                    along = random.choice([-0.75, -0.25, 0.0, 0.25, 0.5, random.uniform(-1, 1)])
                    px, py = -nx * 0.5 + ny * along, -ny * 0.5 - nx * along
                contacts.append((px, py, nx, ny))
            yield mu, contacts


if __name__ == "__main__":
    for mu, contacts in cases(random.Random(20261201)):
        value = exact(generators(contacts, mu))
        if value is not None:
            numbers = [mu] + [x for contact in contacts for x in contact]
            print(",".join(repr(x) for x in numbers) + "=" + format(value, ".17g"))
