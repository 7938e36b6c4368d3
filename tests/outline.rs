//! The rules of an outline one by one: each fault is provoked, and its message names the place and the mend.
#![allow(clippy::unwrap_used, clippy::expect_used, reason = "a test stops at the first surprise")]

mod common;

use common::{assert_close, part};
use holdwright::part::{EdgeId, KeepOutDescription, Part, PartDescription, PartFault};

type Ring = Vec<[f64; 2]>;

/// A plate with no symmetry.
fn plate() -> Ring {
    vec![[0.0, 0.0], [80.0, 0.0], [80.0, 30.0], [35.0, 45.0], [0.0, 40.0]]
}

fn faults(described: PartDescription) -> Vec<PartFault> {
    Part::new(described).expect_err("this part is at fault").0
}

fn ring_faults(rings: Vec<Ring>) -> Vec<PartFault> {
    faults(PartDescription::bare("bad", rings))
}

/// The message of the first fault; it must hold every one of the words.
#[track_caller]
fn says(faults: &[PartFault], words: &[&str]) {
    let message = faults[0].to_string();
    for word in words {
        assert!(message.contains(word), "`{message}` lacks `{word}`");
    }
}

#[test]
fn no_ring() {
    let faults = ring_faults(vec![]);
    assert!(matches!(faults[..], [PartFault::NoRing]));
    says(&faults, &["outer", "at least three"]);
}

#[test]
fn a_number_that_is_none() {
    for bad in [f64::NAN, f64::INFINITY, f64::NEG_INFINITY] {
        let mut ring = plate();
        ring[3][1] = bad;
        let faults = ring_faults(vec![ring]);
        assert!(matches!(faults[..], [PartFault::NotFinite { ring: 0, vertex: 3 }]));
        says(&faults, &["ring 0 vertex 3", "finite", "write a plain number"]);
    }
}

#[test]
fn too_far() {
    let mut described = PartDescription::bare("bad", vec![plate()]);
    described.rings[0][2][0] = 1.5e6;
    described.unit_mm = 1000.0;
    let faults = faults(described);
    assert!(matches!(faults[..], [PartFault::TooFar { ring: 0, vertex: 2, .. }]));
    says(&faults, &["ring 0 vertex 2", "1500000", "1e9 mm", "check the units"]);
}

#[test]
fn too_few_vertices() {
    // A closing vertex does not count.
    for ring in [vec![], vec![[1.0, 2.0]], vec![[0.0, 0.0], [1.0, 0.0], [0.0, 0.0]]] {
        let faults = ring_faults(vec![plate(), ring]);
        assert!(matches!(faults[0], PartFault::TooFewVertices { ring: 1, .. }));
        says(&faults, &["ring 1", "at least three"]);
    }
}

#[test]
fn too_many_vertices() {
    let faults = ring_faults(vec![vec![[0.0, 0.0]; 250_001]]);
    assert!(matches!(faults[..], [PartFault::TooManyVertices { have: 250_001, most: 250_000 }]));
    says(&faults, &["250001", "250000", "simplify"]);
}

#[test]
fn too_small() {
    let tiny = plate().iter().map(|p| p.map(|x| x * 1e-9)).collect();
    let faults = ring_faults(vec![tiny]);
    assert!(matches!(faults[..], [PartFault::TooSmall { .. }]));
    says(&faults, &["check `units`", "smallest is 1e-6 mm"]);
}

#[test]
fn a_vertex_written_twice() {
    let mut ring = plate();
    ring.insert(2, ring[1]);
    let faults = ring_faults(vec![ring]);
    assert!(matches!(faults[..], [PartFault::RepeatedVertex { ring: 0, vertex: 2, before: 1 }]), "{faults:?}");
    says(&faults, &["ring 0 vertex 2", "vertex 1", "remove one"]);
    // The closing vertex written three times: two remain.
    let mut ring = plate();
    ring.extend([ring[0], ring[0]]);
    assert!(matches!(ring_faults(vec![ring])[..], [PartFault::RepeatedVertex { ring: 0, .. }]));
}

#[test]
fn a_spike() {
    let mut ring = plate();
    ring.splice(2..2, [[90.0, 0.0], [80.0, 0.0]]);
    ring.remove(1);
    // ... (0,0) (90,0) (80,0) (80,30): the outline runs out to x = 90 and straight back.
    let faults = ring_faults(vec![ring]);
    assert!(matches!(faults[0], PartFault::Spike { ring: 0, vertex: 1 }), "{faults:?}");
    says(&faults, &["ring 0 vertex 1", "spike", "remove the vertex"]);
}

#[test]
fn edges_that_cross() {
    let faults = ring_faults(vec![vec![[0.0, 0.0], [80.0, 0.0], [0.0, 40.0], [80.0, 50.0]]]);
    assert!(matches!(faults[0], PartFault::Meet { .. }), "{faults:?}");
    says(&faults, &["ring 0 edge 1 crosses ring 0 edge 3", "move one"]);
}

#[test]
fn edges_that_touch() {
    // Vertex 3 dips onto edge 0.
    let mut ring = plate();
    ring[3] = [35.0, 0.0];
    let faults = ring_faults(vec![ring]);
    says(&faults, &["ring 0 edge 0 touches ring 0 edge 2", "move one"]);
    // Edges of two rings that run along each other.
    let hole = vec![[10.0, 0.0], [20.0, 0.0], [15.0, 9.0]];
    let faults = ring_faults(vec![plate(), hole]);
    says(&faults, &["ring 0 edge 0 touches ring 1 edge 0"]);
}

#[test]
fn a_ring_without_area() {
    let hole = vec![[10.0, 10.0], [30.0, 10.0], [20.0, 10.0 + 1e-12]];
    let faults = ring_faults(vec![plate(), hole]);
    assert!(matches!(faults[..], [PartFault::NoArea { ring: 1, .. }]), "{faults:?}");
    says(&faults, &["ring 1", "almost no area", "check its vertices"]);
}

#[test]
fn a_hole_outside() {
    let faults = ring_faults(vec![plate(), vec![[90.0, 0.0], [95.0, 0.0], [90.0, 5.0]]]);
    assert!(matches!(faults[..], [PartFault::HoleOutside { ring: 1 }]));
    says(&faults, &["ring 1", "outside the outer ring", "move it inside"]);
    // Around the part altogether.
    let faults = ring_faults(vec![plate(), vec![[-90.0, -90.0], [300.0, -90.0], [0.0, 300.0]]]);
    assert!(matches!(faults[..], [PartFault::HoleOutside { ring: 1 }]));
}

#[test]
fn a_hole_in_a_hole() {
    let hole = vec![[10.0, 10.0], [30.0, 10.0], [30.0, 30.0], [10.0, 28.0]];
    let inner = vec![[15.0, 15.0], [20.0, 15.0], [15.0, 20.0]];
    let faults = ring_faults(vec![plate(), inner, hole]);
    assert!(matches!(faults[..], [PartFault::HoleInHole { ring: 1, outer: 2 }]), "{faults:?}");
    says(&faults, &["ring 1", "inside ring 2", "remove it"]);
}

#[test]
fn quantities_that_must_be_above_zero() {
    type Set = fn(&mut PartDescription, f64);
    let sets: [(&str, Set); 3] = [
        ("thickness", |d, v| d.thickness = Some(v)),
        ("density_kg_m3", |d, v| d.density_kg_m3 = Some(v)),
        ("mass_kg", |d, v| d.mass_kg = Some(v)),
    ];
    for (key, set) in sets {
        for bad in [0.0, -2.0, f64::NAN, f64::INFINITY] {
            let mut described = PartDescription::bare("bad", vec![plate()]);
            set(&mut described, bad);
            let faults = faults(described);
            assert!(matches!(faults[..], [PartFault::NotPositive { .. }]), "{key} {bad} {faults:?}");
            says(&faults, &[key, "above 0"]);
        }
    }
}

/// Whatever is accepted gives a finite mass and moment.
#[test]
fn mass_never_overflows() {
    for (thickness, density) in [(1e300, 7850.0), (5.0, 1e306), (1e200, 1e200)] {
        let mut described = PartDescription::bare("heavy", vec![plate()]);
        described.thickness = Some(thickness);
        described.density_kg_m3 = Some(density);
        if let Ok(part) = Part::new(described) {
            let mass = part.mass().unwrap();
            assert!(mass.kg.is_finite() && mass.polar_kg_m2.is_finite(), "{mass:?}");
        }
    }
}

#[test]
fn a_centre_of_mass_that_is_no_place() {
    for bad in [[f64::NAN, 0.0], [0.0, f64::INFINITY], [2e9, 0.0]] {
        let mut described = PartDescription::bare("bad", vec![plate()]);
        described.com = Some(bad);
        let faults = faults(described);
        assert!(matches!(faults[..], [PartFault::BadCentreOfMass { .. }]));
        says(&faults, &["com", "two finite numbers"]);
    }
}

fn keep_out(ring: usize, edge: usize, from: Option<f64>, to: Option<f64>) -> PartDescription {
    let mut described = PartDescription::bare("kept", vec![plate()]);
    described.keep_outs.push(KeepOutDescription { ring, edge, from, to, reason: "sealing face".into() });
    described
}

#[test]
fn marks_on_edges_that_are_not_there() {
    let faults_of = |ring, edge| faults(keep_out(ring, edge, None, None));
    says(&faults_of(0, 5), &["keep_out 0", "no ring 0 edge 5", "ring 0 has edges 0..4"]);
    says(&faults_of(1, 0), &["keep_out 0", "no ring 1 edge 0"]);
    let mut described = PartDescription::bare("bad", vec![plate()]);
    described.edge_friction = vec![(0, 1, 0.5), (0, usize::MAX, 0.5)];
    let faults = faults(described);
    assert!(matches!(faults[..], [PartFault::NoSuchEdge { table: "edge_friction", entry: 1, .. }]));
}

#[test]
fn keep_outs_that_are_no_interval() {
    for (from, to) in [
        (Some(-1.0), Some(5.0)),
        (Some(5.0), Some(5.0)),
        (Some(9.0), Some(5.0)),
        (Some(80.0), None),
        (Some(f64::NAN), None),
        (None, Some(f64::INFINITY)),
        (None, Some(0.0)),
    ] {
        let faults = faults(keep_out(0, 0, from, to));
        assert!(matches!(faults[..], [PartFault::BadInterval { entry: 0, .. }]), "{from:?} {to:?} {faults:?}");
        says(&faults, &["keep_out 0", "ring 0 edge 0", "80 mm long", "0 <= from < to"]);
    }
    // An end a hair beyond the edge, or absent, is the edge's own.
    for to in [Some(80.0 + 1e-9), None] {
        let kept = Part::new(keep_out(0, 0, Some(70.0), to)).unwrap();
        assert_close(kept.keep_outs()[0].to_mm, 80.0, 0.0, 0.0);
    }
}

#[test]
fn friction_of_an_edge_that_is_none() {
    for bad in [-0.1, f64::NAN, 11.0] {
        let mut described = PartDescription::bare("bad", vec![plate()]);
        described.edge_friction.push((0, 2, bad));
        let faults = faults(described);
        assert!(matches!(faults[..], [PartFault::BadEdgeFriction { entry: 0, .. }]));
        says(&faults, &["edge_friction 0", "from 0 to 10"]);
    }
}

#[test]
fn every_fault_is_listed_up_to_a_limit() {
    let mut ring = plate();
    ring[0][0] = f64::NAN;
    ring[4][1] = f64::NAN;
    let found = ring_faults(vec![ring, vec![[1.0, 1.0]]]);
    assert_eq!(found.len(), 3, "{found:?}");
    let comb: Ring = vec![[f64::NAN, 0.0]; 50];
    let found = ring_faults(vec![comb]);
    assert_eq!(found.last(), Some(&PartFault::AndMore));
    assert!(found.len() <= 21);
    says(&found[found.len() - 1..], &["and more"]);
}

/// Shewchuk 1997: orientation of nearly collinear points is decided exactly, so a vertex one unit in the last place off
/// a line is sound, and on either side of it.
#[test]
fn nearly_collinear_vertices_are_accepted() {
    let hair = 30.0_f64.next_up();
    for x in [30.0, hair, 30.0_f64.next_down()] {
        let ring = vec![[0.0, 0.0], [30.0, 0.0], [x, 20.0], [30.0, 40.0], [0.0, 41.0]];
        part(vec![ring]);
    }
    // A straight vertex is no spike.
    part(vec![vec![[0.0, 0.0], [10.0, 0.0], [30.0, 0.0], [30.0, 20.0]]]);
    // A vertex one unit in the last place clear of another edge neither touches nor crosses.
    let mut clear = plate();
    clear[3] = [35.0, f64::MIN_POSITIVE];
    part(vec![clear]);
}

/// Either winding, and a closing vertex that repeats the first, give the same part: numbers stay the file's own and
/// normals point into the material.
#[test]
fn either_winding_and_a_closing_vertex_are_accepted() {
    let hole = vec![[10.0, 10.0], [30.0, 12.0], [20.0, 22.0]];
    let reversed = |ring: &Ring| ring.iter().rev().copied().collect::<Ring>();
    let closed = |ring: &Ring| ring.iter().chain(&ring[..1]).copied().collect::<Ring>();
    let first = part(vec![plate(), hole.clone()]);
    for rings in [
        vec![reversed(&plate()), hole.clone()],
        vec![plate(), reversed(&hole)],
        vec![closed(&plate()), closed(&hole)],
        vec![closed(&reversed(&plate())), closed(&reversed(&hole))],
    ] {
        let again = part(rings.clone());
        let (a, b) = (first.outline().region(), again.outline().region());
        assert_close(a.area_mm2, b.area_mm2, 1e-14, 0.0);
        assert_close(a.ixy_mm4, b.ixy_mm4, 1e-12, 0.0);
        let centroid = |p: &Part| p.file_point(p.com());
        assert_close(centroid(&first).x, centroid(&again).x, 1e-13, 0.0);
        assert_close(centroid(&first).y, centroid(&again).y, 1e-13, 0.0);
        for edge in again.outline().edges() {
            let EdgeId { ring, edge: number } = edge.id();
            let file = again.file_point(edge.start());
            assert_close(file.x, rings[ring][number][0], 0.0, 1e-12);
            assert_close(file.y, rings[ring][number][1], 0.0, 1e-12);
            // A hair inward from the middle of every edge there is material: inside the outer ring, outside the hole.
            let middle = again.file_point(edge.point_at(edge.length_mm() / 2.0)) + edge.normal_at(0.0) * 1e-3;
            assert!(inside(&plate(), [middle.x, middle.y]) && !inside(&hole, [middle.x, middle.y]), "{:?}", edge.id());
        }
    }
}

/// Parity of crossings with a ray (Shimrat 1962), by plain division: no point here lies near an edge's line end.
fn inside(ring: &Ring, [x, y]: [f64; 2]) -> bool {
    let crossings = (0..ring.len()).filter(|&i| {
        let (a, b) = (ring[i], ring[(i + 1) % ring.len()]);
        (a[1] > y) != (b[1] > y) && x < a[0] + (y - a[1]) / (b[1] - a[1]) * (b[0] - a[0])
    });
    crossings.count() % 2 == 1
}
