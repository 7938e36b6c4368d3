"""Drawings with known areas: published sections and random shapes, as DXF (ezdxf) and SVG (svgwrite).

Needs ezdxf 1.4, svgwrite 1.4, shapely 2. Writes the drawings beside itself and expected.csv: file, unit to tell (empty
where the drawing states it), number of the part, area in mm2, number of holes, relative tolerance, sagitta in mm (empty
for the default). Areas come from shapely (polygons), from closed forms (circles, ellipses, circular segments) or, for
splines and Bezier curves, from Green's theorem with Gauss-Legendre points exact for their degree or dense beyond need.
Every drawing is made from one seed, so that running this again gives the same shapes.
"""
import csv
import math
import random
from pathlib import Path

import ezdxf
from ezdxf import units
from ezdxf.math import BSpline, Vec2
import svgwrite
from shapely.geometry import Polygon

HERE = Path(__file__).parent
rows = []


def expect(name, area, holes, tolerance, unit="", number=1, sagitta=""):
    rows.append([name, unit, number, repr(float(area)), holes, tolerance, sagitta])


# ---- shapes as lists of (x, y, bulge), bulge of the edge that leaves the vertex


def area_of(ring):
    """Area of a ring with bulges, absolute: shapely for the chords, closed form for the segments beside them."""
    chords = Polygon([(x, y) for x, y, _ in ring])
    signed = chords.area if chords.exterior.is_ccw else -chords.area
    for (x, y, bulge), (u, v, _) in zip(ring, ring[1:] + ring[:1]):
        if bulge:
            sweep = 4 * math.atan(bulge)
            radius = math.dist((x, y), (u, v)) / (2 * math.sin(sweep / 2))
            signed += radius * radius / 2 * (sweep - math.sin(sweep))
    return abs(signed)


def rounded(corners):
    """A polygon with rounded corners: (x, y, radius); tangent points lie r / tan(half the corner's angle) away."""
    ring = []
    n = len(corners)
    for i, (x, y, r) in enumerate(corners):
        if not r:
            ring.append((x, y, 0.0))
            continue
        back = (Vec2(corners[i - 1][:2]) - Vec2(x, y)).normalize()
        on = (Vec2(corners[(i + 1) % n][:2]) - Vec2(x, y)).normalize()
        angle = math.acos(max(-1.0, min(1.0, back.dot(on))))
        leg = r / math.tan(angle / 2)
        a, b = Vec2(x, y) + back * leg, Vec2(x, y) + on * leg
        turn = math.pi - angle
        sign = 1.0 if (-back).det(on) > 0 else -1.0
        ring.append((a.x, a.y, sign * math.tan(turn / 4)))
        ring.append((b.x, b.y, 0.0))
    return ring


def svg_path(ring):
    """Path data with circular arcs; y is turned down, so a positive bulge, counter-clockwise with y up, has sweep 0."""
    n = len(ring)
    data = [f"M {ring[0][0]!r} {-ring[0][1]!r}"]
    for i, (x, y, bulge) in enumerate(ring):
        u, v, _ = ring[(i + 1) % n]
        if bulge:
            sweep = 4 * math.atan(bulge)
            radius = abs(math.dist((x, y), (u, v)) / (2 * math.sin(sweep / 2)))
            data.append(f"A {radius!r} {radius!r} 0 {int(abs(sweep) > math.pi)} {int(bulge < 0)} {u!r} {-v!r}")
        elif i + 1 < n:
            data.append(f"L {u!r} {-v!r}")
    return " ".join(data) + " Z"


def dxf(version="R2010", unit=units.MM):
    drawing = ezdxf.new(version)
    drawing.units = unit
    return drawing


def svg(name, width, height, unit="mm", profile="tiny"):
    """A drawing with y down from 0 to -height: the viewBox begins at -height."""
    drawing = svgwrite.Drawing(HERE / name, size=(f"{width}{unit}", f"{height}{unit}"), profile=profile, debug=False)
    drawing.viewbox(0, -height, width, height)
    return drawing


# ---- published sections: dimensions as in the standards' tables, mm


def i_section(h, b, web, flange, root):
    left, right = (b - web) / 2, (b + web) / 2
    return [rounded([(0, 0, 0), (b, 0, 0), (b, flange, 0), (right, flange, root), (right, h - flange, root),
                     (b, h - flange, 0), (b, h, 0), (0, h, 0), (0, h - flange, 0), (left, h - flange, root),
                     (left, flange, root), (0, flange, 0)])]


def tube(b, h, wall):
    def ring(inset, radius):
        return rounded([(inset, inset, radius), (b - inset, inset, radius), (b - inset, h - inset, radius),
                        (inset, h - inset, radius)])
    return [ring(0, 2 * wall), ring(wall, wall)]


SECTIONS = {
    "angle_60x40x5": [rounded([(0, 0, 0), (40, 0, 0), (40, 5, 3), (5, 5, 6), (5, 60, 3), (0, 60, 0)])],
    "ipe_100": i_section(100, 55, 4.1, 5.7, 7),
    "ipe_200": i_section(200, 100, 5.6, 8.5, 12),
    "upe_100": [rounded([(0, 0, 0), (55, 0, 0), (55, 7.5, 0), (4.5, 7.5, 10), (4.5, 92.5, 10), (55, 92.5, 0),
                         (55, 100, 0), (0, 100, 0)])],
    "rhs_60x40x4": tube(40, 60, 4),
    "rhs_50x30x3": tube(30, 50, 3),
}


def sections():
    for name, rings in SECTIONS.items():
        drawing = dxf()
        for ring in rings:
            drawing.modelspace().add_lwpolyline(ring, format="xyb", close=True)
        drawing.saveas(HERE / f"{name}.dxf")
        width = max(x for x, _, _ in rings[0])
        height = max(y for _, y, _ in rings[0])
        picture = svg(f"{name}.svg", width, height)
        picture.add(picture.path(d=" ".join(svg_path(ring) for ring in rings), fill_rule="evenodd"))
        picture.save()


# ---- random shapes


def star(dice, x, y, low, high, count, bulged=False):
    """A star-shaped ring about a point: radii from low to high at rising angles."""
    turn = dice.uniform(0, math.tau)
    ring = []
    for i in range(count):
        angle = turn + math.tau * (i + dice.uniform(-0.3, 0.3)) / count
        radius = dice.uniform(low, high)
        # Bulges so small that an arc stays between the radii of its ends and its neighbours.
        bulge = dice.uniform(-0.15, 0.15) if bulged and dice.random() < 0.6 else 0.0
        ring.append((x + radius * math.cos(angle), y + radius * math.sin(angle), bulge))
    return ring


def holed(dice, bulged):
    """An outer star with holes in a grid well inside it."""
    outer = star(dice, 60, 55, 42, 54, dice.randint(7, 40), bulged)
    spots = [(45, 45), (75, 45), (45, 68), (75, 66), (60, 56)]
    dice.shuffle(spots)
    holes = [star(dice, x, y, 2.5, 5.0, dice.randint(3, 9), bulged) for x, y in spots[: dice.randint(0, 5)]]
    return [outer] + holes


def net(rings):
    return area_of(rings[0]) - sum(area_of(ring) for ring in rings[1:])


VERSIONS = ["R12", "R2000", "R2004", "R2007", "R2010", "R2013", "R2018"]


def edges(ring):
    return list(zip(ring, ring[1:] + ring[:1]))


def add_loose(dice, space, ring, layer="0"):
    """Every edge an entity of its own, in any order and direction; arcs as ARC, which always runs counter-clockwise."""
    entities = []
    for (x, y, bulge), (u, v, _) in edges(ring):
        if bulge:
            a, b = (Vec2(x, y), Vec2(u, v)) if bulge > 0 else (Vec2(u, v), Vec2(x, y))
            sweep = 4 * math.atan(abs(bulge))
            radius = (b - a).magnitude / (2 * math.sin(sweep / 2))
            middle = a.lerp(b) + (b - a).orthogonal().normalize() * (radius * math.cos(sweep / 2))
            entities.append(("arc", middle, radius, (a - middle).angle_deg, (b - middle).angle_deg))
        elif dice.random() < 0.5:
            entities.append(("line", (x, y), (u, v)))
        else:
            entities.append(("line", (u, v), (x, y)))
    dice.shuffle(entities)
    for kind, *rest in entities:
        if kind == "arc":
            space.add_arc(*rest, dxfattribs={"layer": layer})
        else:
            space.add_line(*rest, dxfattribs={"layer": layer})


def random_dxf():
    dice = random.Random(20261201)
    for i in range(28):
        rings = holed(dice, bulged=i % 2 == 1)
        version = VERSIONS[i % len(VERSIONS)]
        drawing = dxf(version)
        space = drawing.modelspace()
        way = ["light", "loose", "heavy", "mixed"][i // 7]
        for ring in rings:
            this = dice.choice(["light", "loose", "heavy"]) if way == "mixed" else way
            if this == "light" and version == "R12":
                this = "heavy"
            if this == "light":
                space.add_lwpolyline(ring, format="xyb", close=True)
            elif this == "heavy":
                space.add_polyline2d(ring, format="xyb", close=True)
            else:
                add_loose(dice, space, ring)
        name = f"random_{i:02}_{way}_{version}.dxf"
        binary = i % 3 == 2
        drawing.saveas(HERE / name, fmt="bin" if binary else "asc")
        # An arc's ends come from its centre, radius and angles, which are rounded: the joints move by 1e-14.
        expect(name, net(rings), len(rings) - 1, 1e-9, unit="mm" if version == "R12" else "")


def blocks_dxf():
    """One block, placed scaled, turned, mirrored, nested, in an array: areas multiply by the determinant."""
    dice = random.Random(7)
    drawing = dxf()
    hole = star(dice, 1, 2, 0.6, 1.0, 7, True)
    block = drawing.blocks.new("HOLE", base_point=(1, 2))
    block.add_lwpolyline(hole, format="xyb", close=True)
    pair = drawing.blocks.new("PAIR")
    pair.add_blockref("HOLE", (0, 0), dxfattribs={"rotation": 33})
    pair.add_blockref("HOLE", (4, 0), dxfattribs={"xscale": -1.5, "yscale": 1.5, "rotation": 10})
    space = drawing.modelspace()
    space.add_lwpolyline([(0, 0), (100, 0), (100, 60), (0, 60)], close=True)
    space.add_blockref("PAIR", (10, 10), dxfattribs={"xscale": 2, "yscale": 2, "rotation": 90})
    space.add_blockref("HOLE", (30, 10), dxfattribs={"column_count": 4, "row_count": 3, "column_spacing": 8,
                                                     "row_spacing": 7, "rotation": 20})
    space.add_blockref("PAIR", (80, 30), dxfattribs={"xscale": -1, "yscale": 1})
    # Drawn from behind: the entity's x runs the other way.
    space.add_lwpolyline([(-90, 45, 1), (-86, 45, 1)], format="xyb", close=True,
                         dxfattribs={"extrusion": (0, 0, -1)})
    drawing.saveas(HERE / "blocks.dxf")
    one = area_of(hole)
    area = 6000 - one * (4 * (1 + 2.25) + 12 + (1 + 2.25)) - math.pi * 4
    expect("blocks.dxf", area, 2 + 12 + 2 + 1, 1e-9)
    # Scaled unlike in x and y, arcs become ellipses.
    drawing = dxf(unit=units.IN)
    block = drawing.blocks.new("SLOT")
    block.add_lwpolyline([(0, 0, 0), (4, 0, 1), (4, 2, 0), (0, 2, 1)], format="xyb", close=True)
    space = drawing.modelspace()
    space.add_lwpolyline([(0, 0), (30, 0), (30, 20), (0, 20)], close=True)
    space.add_blockref("SLOT", (5, 5), dxfattribs={"xscale": 1.25, "yscale": 2.5, "rotation": 25})
    space.add_circle((22, 12), 1.5)
    drawing.saveas(HERE / "slot_in.dxf")
    area = (600 - (8 + math.pi) * 1.25 * 2.5 - math.pi * 2.25) * 25.4**2
    expect("slot_in.dxf", area, 2, 1e-6, sagitta="0.0005")


def green(points):
    """Signed area of a closed curve given as a function of t in [0, 1] by pieces: sum of x dy - y dx over Gauss points."""
    return sum(w * (x * dy - y * dx) for w, (x, y), (dx, dy) in points) / 2


# Gauss-Legendre on [0, 1], 5 points: exact up to degree 9.
_NODES = [(0.04691007703066800, 0.11846344252809454), (0.23076534494715845, 0.23931433524968324), (0.5, 0.28444444444444444),
          (0.76923465505284155, 0.23931433524968324), (0.95308992296933200, 0.11846344252809454)]


def curves_dxf():
    dice = random.Random(11)
    for i in range(4):
        count = dice.randint(8, 14)
        control = [(60 + r * math.cos(a), 50 + r * math.sin(a)) for r, a in
                   ((dice.uniform(30, 45), math.tau * k / count) for k in range(count))]
        closed = control + control[:3]
        drawing = dxf()
        space = drawing.modelspace()
        # A closed cubic on evenly spaced knots.
        knots = [float(k) for k in range(len(closed) + 4)]
        spline = space.add_spline(degree=3)
        spline.control_points = [(x, y, 0) for x, y in closed]
        spline.knots = knots
        # Cut to one turn: the domain of the curve is knots[3] to knots[-4].
        curve = BSpline(closed, order=4, knots=knots)
        points = []
        for k in range(3, len(knots) - 4):
            for node, weight in _NODES:
                (p, d) = curve.derivative(knots[k] + node, n=1)
                points.append((weight, (p.x - 60, p.y - 50), (d.x, d.y)))
        area = abs(green(points))
        space.add_ellipse((60, 50), (6, 2), 0.4)
        space.add_ellipse((60, 62), (0, 3), 0.7, math.radians(20), math.radians(200))
        ends = [Vec2(60, 62) + Vec2(0, 3) * math.cos(t) + Vec2(-2.1, 0) * math.sin(t)
                for t in (math.radians(20), math.radians(200))]
        space.add_line(ends[0], ends[1])
        area -= math.pi * math.hypot(6, 2) ** 2 * 0.4
        # Half an ellipse cut by a chord through its centre.
        area -= math.pi * 3 * 2.1 / 2
        name = f"curves_{i}.dxf"
        drawing.saveas(HERE / name)
        expect(name, area, 2, 1e-6, sagitta="0.0001")
    # A rational quadratic: nine control points make a true circle.
    drawing = dxf(unit=units.CM)
    space = drawing.modelspace()
    w = math.sqrt(0.5)
    square = [(2, 0), (2, 2), (0, 2), (-2, 2), (-2, 0), (-2, -2), (0, -2), (2, -2), (2, 0)]
    spline = space.add_spline(degree=2)
    spline.control_points = [(x + 5, y + 5, 0) for x, y in square]
    spline.weights = [1, w, 1, w, 1, w, 1, w, 1]
    spline.knots = [0, 0, 0, 1, 1, 2, 2, 3, 3, 4, 4, 4]
    drawing.saveas(HERE / "circle_by_spline_cm.dxf")
    expect("circle_by_spline_cm.dxf", math.pi * 400, 0, 1e-6, sagitta="0.0001")


def layers_dxf():
    """Several layers and parts; a hidden, a frozen, a paper space and an invisible thing; unlike units."""
    drawing = dxf("R2013", units.FT)
    drawing.layers.add("CUT")
    drawing.layers.add("OFF").off()
    drawing.layers.add("FROZEN").freeze()
    space = drawing.modelspace()
    space.add_lwpolyline([(0, 0), (1, 0), (1, 0.5), (0, 0.5)], close=True, dxfattribs={"layer": "CUT"})
    space.add_circle((0.5, 0.25), 0.1, dxfattribs={"layer": "cut"})
    space.add_lwpolyline([(2, 0), (2.5, 0), (2.25, 0.5)], close=True, dxfattribs={"layer": "CUT"})
    space.add_line((-1, -1), (3, 3), dxfattribs={"layer": "OFF"})
    space.add_line((-1, -1), (3, 3), dxfattribs={"layer": "FROZEN"})
    space.add_line((-1, -1), (3, 3), dxfattribs={"invisible": 1})
    space.add_text("cut twice", dxfattribs={"layer": "0"})
    drawing.layout("Layout1").add_line((0, 0), (9, 9))
    drawing.saveas(HERE / "layers_ft.dxf")
    expect("layers_ft.dxf", (0.5 - math.pi * 0.01) * 304.8**2, 1, 1e-9, number=1)
    expect("layers_ft.dxf", 0.125 * 304.8**2, 0, 1e-9, number=2)
    # Nested loops: a part in the hole of another.
    drawing = dxf("R2000")
    space = drawing.modelspace()
    for side in (50, 40, 30, 20, 10):
        space.add_lwpolyline([(-side, -side), (side, -side), (side, side), (-side, side)], close=True)
    drawing.saveas(HERE / "nested.dxf")
    for number, (outer, hole) in enumerate([(50, 40), (30, 20), (10, 0)], 1):
        expect("nested.dxf", 4 * (outer**2 - hole**2), 1 if hole else 0, 1e-9, number=number)


def random_svg():
    dice = random.Random(4)
    for i in range(16):
        rings = holed(dice, bulged=i % 2 == 1)
        name = f"random_{i:02}.svg"
        picture = svg(name, 120, 110, profile="full")
        where = picture
        scale = 1.0
        if i % 4 >= 2:
            # Turned, mirrored and scaled as a whole: areas by the determinant.
            where = picture.add(picture.g(id="turned", transform="translate(60,-55) rotate(37) scale(-0.5,0.5) translate(-60,55)"))
            scale = 0.25
        if i % 3 == 0:
            where.add(picture.path(d=" ".join(svg_path(ring) for ring in rings), fill="none", stroke="black"))
        elif i % 3 == 1:
            for ring in rings:
                where.add(picture.path(d=svg_path(ring)))
        else:
            for ring in rings:
                if any(bulge for _, _, bulge in ring):
                    where.add(picture.path(d=svg_path(ring)))
                else:
                    where.add(picture.polygon([(x, -y) for x, y, _ in ring]))
        picture.save()
        expect(name, net(rings) * scale, len(rings) - 1, 1e-9)


def cubic_area(p):
    """Twice the signed area under a cubic Bezier curve seen from the origin, by Gauss points exact for its degree."""
    total = 0.0
    for t, weight in _NODES:
        s = 1 - t
        at = [s**3 * p[0][k] + 3 * s * s * t * p[1][k] + 3 * s * t * t * p[2][k] + t**3 * p[3][k] for k in (0, 1)]
        speed = [3 * (s * s * (p[1][k] - p[0][k]) + 2 * s * t * (p[2][k] - p[1][k]) + t * t * (p[3][k] - p[2][k]))
                 for k in (0, 1)]
        total += weight * (at[0] * speed[1] - at[1] * speed[0])
    return total


def shapes_svg():
    # Basic shapes in use elements, nested svg and transforms; inches and a viewBox of its own scale.
    picture = svgwrite.Drawing(HERE / "shapes.svg", size=("5in", "4in"), profile="full", debug=False)
    picture.viewbox(0, 0, 500, 400)
    symbol = picture.defs.add(picture.g(id="boss"))
    symbol.add(picture.circle((0, 0), 8))
    picture.add(picture.rect((10, 10), (480, 380), 30, 20))
    picture.add(picture.use("#boss", insert=(60, 60)))
    picture.add(picture.use("#boss", transform="translate(400,300) scale(2,1) rotate(30)"))
    picture.add(picture.ellipse((250, 200), (60, 25), transform="rotate(20,250,200)"))
    inner = picture.add(picture.svg(insert=(300, 40), size=(100, 50)))
    inner.viewbox(0, 0, 10, 10)
    inner.add(picture.rect((1, 1), (8, 8)))
    picture.add(picture.text("boss", insert=(10, 10)))
    picture.save()
    unit = 25.4 / 100
    # preserveAspectRatio is "meet": the nested square is scaled by 5 both ways.
    area = 480 * 380 - (4 - math.pi) * 30 * 20 - math.pi * 64 * (1 + 2) - math.pi * 60 * 25 - 64 * 25
    expect("shapes.svg", area * unit**2, 4, 1e-6, sagitta="0.0001")
    # Closed cubic and quadratic curves through points of a ring, smooth by mirrored control points.
    dice = random.Random(5)
    for i in range(4):
        count = dice.randint(5, 9)
        around = [(60 + r * math.cos(a), 55 + r * math.sin(a)) for r, a in
                  ((dice.uniform(34, 44), math.tau * k / count) for k in range(count))]
        tangents = [((around[(k + 1) % count][0] - around[k - 1][0]) / 6, (around[(k + 1) % count][1] - around[k - 1][1]) / 6)
                    for k in range(count)]
        data = [f"M{around[0][0]!r},{around[0][1]!r}"]
        twice = 0.0
        for k in range(count):
            (x, y), (u, v) = around[k], around[(k + 1) % count]
            (a, b), (c, d) = tangents[k], tangents[(k + 1) % count]
            p = [(x, y), (x + a, y + b), (u - c, v - d), (u, v)]
            if k == 0:
                data.append(f"C{p[1][0]!r},{p[1][1]!r} {p[2][0]!r},{p[2][1]!r} {u!r},{v!r}")
            else:
                data.append(f"S{p[2][0]!r},{p[2][1]!r} {u!r},{v!r}")
            twice += cubic_area(p)
        name = f"curves_{i}.svg"
        picture = svgwrite.Drawing(HERE / name, size=("120mm", "110mm"), profile="full", debug=False)
        picture.viewbox(0, 0, 120, 110)
        # A quadratic lens: two curves over a chord of 16 with their control points 12 off it; each holds 2/3 of the
        # triangle of its control points.
        data.append("Z m0,0 M52,55 Q60,43 68,55 T52,55 Z")
        picture.add(picture.path(d=" ".join(data), fill_rule="evenodd"))
        picture.save()
        expect(name, abs(twice) / 2 - 2 * (2 / 3) * (16 * 12 / 2), 1, 1e-6, sagitta="0.0001")


if __name__ == "__main__":
    sections()
    random_dxf()
    blocks_dxf()
    curves_dxf()
    layers_dxf()
    random_svg()
    shapes_svg()
    with open(HERE / "expected.csv", "w", newline="") as out:
        writer = csv.writer(out, lineterminator="\n")
        writer.writerow(["file", "unit", "number", "area_mm2", "holes", "tolerance", "sagitta_mm"])
        writer.writerows(rows)
