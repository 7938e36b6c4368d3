//! Area, centroid, second moments and mass against published section tables and elementary subtraction.

mod common;

use common::{Corner, assert_close, part, rounded, rounded_with_arcs};
use holdwright::part::{Part, PartDescription};

/// Tables print three or four digits and leave the rolling tolerance out: 0.5 % and half a unit of the last digit.
#[track_caller]
fn as_printed(value: f64, printed: f64, last_digit: f64) {
    assert_close(value, printed, 0.005, last_digit / 2.0);
}

/// A section drawn twice: its fillets as chords, and as arcs.
fn section(rings: &[Vec<Corner>]) -> [Part; 2] {
    [part(rings.iter().map(|ring| rounded(ring)).collect()), rounded_with_arcs(rings)]
}

fn sharp(x: f64, y: f64) -> Corner {
    ([x, y], 0.0)
}

/// EN 10056-1: L 60 x 40 x 5, root radius 6, toe radius 3. Area 4.79 cm2, centroid 1.96 and 0.97 cm, I 17.2 and 6.11 cm4.
#[test]
fn unequal_angle() {
    for angle in section(&[vec![
        sharp(0.0, 0.0),
        sharp(40.0, 0.0),
        ([40.0, 5.0], 3.0),
        ([5.0, 5.0], 6.0),
        ([5.0, 60.0], 3.0),
        sharp(0.0, 60.0),
    ]]) {
        let region = angle.outline().region();
        as_printed(region.area_mm2 / 100.0, 4.79, 0.01);
        as_printed(region.centroid.y / 10.0, 1.96, 0.01);
        as_printed(region.centroid.x / 10.0, 0.97, 0.01);
        as_printed(region.ixx_mm4 / 1e4, 17.2, 0.1);
        as_printed(region.iyy_mm4 / 1e4, 6.11, 0.01);
    }
}

fn i_section(h: f64, b: f64, web: f64, flange: f64, root: f64) -> [Part; 2] {
    let (left, right) = ((b - web) / 2.0, (b + web) / 2.0);
    let round = |x: f64, y: f64| ([x, y], root);
    section(&[vec![
        sharp(0.0, 0.0),
        sharp(b, 0.0),
        sharp(b, flange),
        round(right, flange),
        round(right, h - flange),
        sharp(b, h - flange),
        sharp(b, h),
        sharp(0.0, h),
        sharp(0.0, h - flange),
        round(left, h - flange),
        round(left, flange),
        sharp(0.0, flange),
    ]])
}

/// EN 10365: IPE 100 (100 55 4.1 5.7 r 7) 10.3 cm2, 171 cm4; IPE 200 (200 100 5.6 8.5 r 12) 28.5 cm2, 1943 cm4.
#[test]
fn i_beams() {
    for ipe_100 in i_section(100.0, 55.0, 4.1, 5.7, 7.0) {
        as_printed(ipe_100.outline().region().area_mm2 / 100.0, 10.3, 0.1);
        as_printed(ipe_100.outline().region().ixx_mm4 / 1e4, 171.0, 1.0);
    }
    for ipe_200 in i_section(200.0, 100.0, 5.6, 8.5, 12.0) {
        as_printed(ipe_200.outline().region().area_mm2 / 100.0, 28.5, 0.1);
        as_printed(ipe_200.outline().region().ixx_mm4 / 1e4, 1943.0, 1.0);
    }
}

/// DIN 1026-2: UPE 100 (100 55 4.5 7.5 r 10): 12.5 cm2, 207 and 38.3 cm4, centroid 1.91 cm from the web's back.
#[test]
fn parallel_flange_channel() {
    for channel in section(&[vec![
        sharp(0.0, 0.0),
        sharp(55.0, 0.0),
        sharp(55.0, 7.5),
        ([4.5, 7.5], 10.0),
        ([4.5, 92.5], 10.0),
        sharp(55.0, 92.5),
        sharp(55.0, 100.0),
        sharp(0.0, 100.0),
    ]]) {
        let region = channel.outline().region();
        as_printed(region.area_mm2 / 100.0, 12.5, 0.1);
        as_printed(region.ixx_mm4 / 1e4, 207.0, 1.0);
        as_printed(region.iyy_mm4 / 1e4, 38.3, 0.1);
        as_printed(region.centroid.x / 10.0, 1.91, 0.01);
    }
}

fn tube(b: f64, h: f64, wall: f64) -> [Part; 2] {
    let ring = |inset: f64, radius: f64| {
        vec![
            ([inset, inset], radius),
            ([b - inset, inset], radius),
            ([b - inset, h - inset], radius),
            ([inset, h - inset], radius),
        ]
    };
    section(&[ring(0.0, 2.0 * wall), ring(wall, wall)])
}

/// EN 10219-2, corner radii 2 t outside and t inside: RHS 60 x 40 x 4 6.95 cm2, 30.99 cm4 (about the axis across the
/// long side); RHS 50 x 30 x 3 4.21 cm2, 12.83 and 5.70 cm4.
#[test]
fn rectangular_hollow_sections() {
    for large in tube(40.0, 60.0, 4.0) {
        as_printed(large.outline().region().area_mm2 / 100.0, 6.95, 0.01);
        as_printed(large.outline().region().ixx_mm4 / 1e4, 30.99, 0.01);
    }
    for small in tube(30.0, 50.0, 3.0) {
        as_printed(small.outline().region().area_mm2 / 100.0, 4.21, 0.01);
        as_printed(small.outline().region().ixx_mm4 / 1e4, 12.83, 0.01);
        as_printed(small.outline().region().iyy_mm4 / 1e4, 5.70, 0.01);
    }
}

/// A rectangle less two rectangular holes, all off centre: areas, first and second moments subtract (parallel-axis
/// theorem, Steiner).
#[test]
fn a_plate_with_two_holes() {
    // x, y, width, height, sign
    let blocks = [(-3.0, 2.0, 90.0, 40.0, 1.0), (5.0, 10.0, 20.0, 12.0, -1.0), (60.0, 6.0, 8.0, 30.0, -1.0)];
    let ring = |(x, y, w, h, _): (f64, f64, f64, f64, f64)| vec![[x, y], [x + w, y], [x + w, y + h], [x, y + h]];
    let mut described = PartDescription::bare("holed", blocks.iter().map(|&b| ring(b)).collect());
    described.thickness = Some(0.8);
    described.unit_mm = 10.0;
    described.material = Some(" Brass ".into());
    let part = Part::new(described).unwrap();

    let sum = |f: &dyn Fn(f64, f64, f64, f64) -> f64| -> f64 {
        blocks.iter().map(|&(x, y, w, h, sign)| sign * w * h * f(x + w / 2.0, y + h / 2.0, w, h)).sum()
    };
    let area = sum(&|_, _, _, _| 1.0);
    let (cx, cy) = (sum(&|x, _, _, _| x) / area, sum(&|_, y, _, _| y) / area);
    let ixx = sum(&|_, y, _, h| h * h / 12.0 + (y - cy).powi(2));
    let iyy = sum(&|x, _, w, _| w * w / 12.0 + (x - cx).powi(2));
    let ixy = sum(&|x, y, _, _| (x - cx) * (y - cy));
    let region = part.outline().region();
    assert_close(region.area_mm2, area * 1e2, 1e-12, 0.0);
    assert_close(part.file_point(part.com()).x, cx * 10.0, 1e-12, 0.0);
    assert_close(part.file_point(part.com()).y, cy * 10.0, 1e-12, 0.0);
    assert_close(region.ixx_mm4, ixx * 1e4, 1e-12, 0.0);
    assert_close(region.iyy_mm4, iyy * 1e4, 1e-12, 0.0);
    assert_close(region.ixy_mm4, ixy * 1e4, 1e-12, 0.0);
    // 8 mm of brass at 8500 kg/m3 (Gere, Mechanics of Materials, 5th ed., Table H-1, middle of the range).
    let mass = part.mass().unwrap();
    assert_close(mass.kg, area * 1e2 * 8.0 * 8500e-9, 1e-12, 0.0);
    assert_close(mass.polar_kg_m2, 8.0 * 8500e-9 * (ixx + iyy) * 1e4 * 1e-6, 1e-12, 0.0);
}

/// A centre of mass of its own: the polar moment grows by m d^2 (Steiner), in the file's frame and unit.
#[test]
fn a_centre_of_mass_off_the_centroid() {
    let ring = vec![[2.0, 1.0], [10.0, 1.0], [10.0, 5.0], [2.0, 5.0]];
    let mut described = PartDescription::bare("weighted", vec![ring]);
    described.unit_mm = 25.4;
    described.mass_kg = Some(0.41);
    described.com = Some([7.0, 2.0]);
    let part = Part::new(described).unwrap();
    let (w, h, d2): (f64, f64, f64) = (8.0 * 25.4, 4.0 * 25.4, (1.0_f64 + 1.0) * 25.4 * 25.4);
    assert_close(part.mass().unwrap().polar_kg_m2, 0.41 * ((w * w + h * h) / 12.0 + d2) * 1e-6, 1e-12, 0.0);
    assert_close(part.file_point(part.com()).x, 7.0 * 25.4, 1e-14, 0.0);
    // Farthest corner is (2, 5).
    assert_close(part.reach_mm(), 34.0_f64.sqrt() * 25.4, 1e-13, 0.0);
}

/// Moments about the centroid do not depend on where the part was drawn. All coordinates are dyadic, so moving them a
/// kilometre is exact.
#[test]
fn a_part_drawn_a_kilometre_away() {
    let near: Vec<Vec<[f64; 2]>> = vec![
        vec![[0.25, -3.5], [80.0, 0.0], [91.125, 30.5], [35.0, 44.75], [-7.0, 40.0]],
        vec![[20.0, 10.0], [30.5, 12.0], [21.0, 25.25]],
    ];
    let first = part(near.clone());
    for by in [[1e6, 0.0], [-1e6, 1e6], [3.0, -1_048_576.0]] {
        let far = part(near.iter().map(|r| r.iter().map(|p| [p[0] + by[0], p[1] + by[1]]).collect()).collect());
        let (a, b) = (first.outline().region(), far.outline().region());
        assert_close(a.area_mm2, b.area_mm2, 1e-14, 0.0);
        assert_close(a.ixx_mm4, b.ixx_mm4, 1e-13, 0.0);
        assert_close(a.iyy_mm4, b.iyy_mm4, 1e-13, 0.0);
        assert_close(a.ixy_mm4, b.ixy_mm4, 1e-12, 0.0);
        assert_close(first.reach_mm(), far.reach_mm(), 1e-14, 0.0);
        assert_close(far.file_point(far.com()).x, first.file_point(first.com()).x + by[0], 0.0, 1e-9);
        assert_close(far.file_point(far.com()).y, first.file_point(first.com()).y + by[1], 0.0, 1e-9);
    }
}
