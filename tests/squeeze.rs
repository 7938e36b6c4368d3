//! Squeeze, load margin, friction for holding and the acceleration envelope.
//!
//! Sources: tests/reference/squeeze.py (HiGHS through highspy; versions, seed and columns stated there), which builds its
//! own wrenches from the definition and knows nothing of this program; Clarabel, an interior-point solver for the exact
//! quadratic friction cones; closed forms (statics, derived beside each).
#![allow(clippy::unwrap_used, clippy::expect_used, reason = "a test stops at the first surprise")]

mod common;

use clarabel::algebra::CscMatrix;
use clarabel::solver::{DefaultSettings, DefaultSolver, IPSolver, SolverStatus, SupportedConeT};
use common::{Dice, assert_close, frame, touch};
use holdwright::hand::Drive;
use holdwright::mechanics::holding::{self, Asked};
use holdwright::mechanics::jaw_formula::{self, Lies, NoFormula};
use holdwright::mechanics::load::{Body, Load};
use holdwright::mechanics::program::{self, Solved};
use holdwright::mechanics::spatial::{Hold, Pyramid, Wrench};
use holdwright::mechanics::squeeze::{Answer, BEYOND, Squeezer};
use holdwright::mechanics::{Case, Contact, Frame, Holding, Limit, LimitedBy, LoadCase, Wrenches};
use nalgebra::{Point2, Rotation2, Vector2};

const TABLE: &str = include_str!("reference/squeeze.csv");

/// Ours carries a proof to 1e-9; HiGHS was asked for 1e-10.
const BATCH: f64 = 1e-8;
/// The linear program is held to residuals of 1e-8 of its largest weight.
const PROGRAM: f64 = 1e-6;

/// Fingers, their frame, what they are pressed with.
#[derive(Clone)]
struct Grip {
    contacts: Vec<Contact>,
    frame: Frame,
    half_height_mm: f64,
    pyramid: Pyramid,
    drive: Drive,
}

impl Grip {
    fn hold(&self) -> Hold<'_> {
        let wrenches = Wrenches::new(&self.contacts, &self.frame);
        Hold::of(&wrenches, self.half_height_mm / self.frame.scale_mm, &self.pyramid, self.drive)
    }

    /// Squeeze by the batch solver; infinite where no squeeze holds the load.
    fn squeeze(&self, load: &Wrench) -> f64 {
        match Squeezer::new(self.hold()).squeeze(load) {
            Answer::Held(held) => held.squeeze_n,
            Answer::Never { .. } => f64::INFINITY,
            Answer::Unsure => panic!("unsure of {:?} under {load}", self.contacts),
        }
    }

    fn in_plane(&self) -> bool {
        self.half_height_mm == 0.0
    }
}

/// A load about the centre of mass, torques in N mm.
fn load(force: [f64; 3], torque_n_mm: [f64; 3], frame: &Frame) -> Wrench {
    let torque = torque_n_mm.map(|t| t / frame.scale_mm);
    Wrench::new(force[0], force[1], force[2], torque[0], torque[1], torque[2])
}

struct Row {
    line: usize,
    kind: &'static str,
    grip: Grip,
    load: Wrench,
    limit_n: f64,
    squeeze: Option<f64>,
    margin: Option<f64>,
    factor: &'static str,
    /// Distance from the edge of what can be held at all, relative to the load.
    inside: f64,
}

impl Row {
    fn read(line: usize, text: &'static str) -> Self {
        let (given, found) = text.split_once('=').unwrap();
        let given: Vec<&str> = given.split(',').collect();
        let [kind, _rows, _tool, drive, sides, fingers] = given[..6] else { panic!("line {line}") };
        let sides: usize = sides.parse().unwrap();
        let n: Vec<f64> = given[6..].iter().map(|x| x.parse().unwrap()).collect();
        let fingers: usize = fingers.parse().unwrap();
        assert_eq!(n.len(), 2 + 6 * fingers + 7, "line {line}");
        let frame = frame(0.0, 0.0, n[0]);
        let contact = |c: &[f64]| Contact {
            point: Point2::new(c[0], c[1]),
            normal: Vector2::new(c[2], c[3]),
            mu: c[4],
            half_width_mm: c[5],
        };
        let rest = &n[2 + 6 * fingers..];
        let found: Vec<&str> = found.split(',').collect();
        let value = |at: usize| (found[at] != "-").then(|| found[at].parse::<f64>().unwrap());
        Self {
            line,
            kind,
            grip: Grip {
                contacts: n[2..2 + 6 * fingers].chunks_exact(6).map(contact).collect(),
                frame,
                half_height_mm: n[1],
                pyramid: if sides == 2 { Pyramid::planar() } else { Pyramid::new(sides).unwrap() },
                drive: if drive == "equal" { Drive::Equal } else { Drive::Adjustable },
            },
            load: load([rest[0], rest[1], rest[2]], [rest[3], rest[4], rest[5]], &frame),
            limit_n: rest[6],
            squeeze: value(0),
            margin: value(1),
            factor: found[2],
            inside: value(3).unwrap_or(0.0),
        }
    }

    /// Within rounding of what can be held at all, where a squeeze means little.
    fn near_the_edge(&self) -> bool {
        self.kind.starts_with("edge") || self.kind.starts_with("under")
    }

    /// Digits a squeeze has: bases nearly singular leave fewer.
    fn tolerance(&self) -> f64 {
        if self.inside.abs() < 1e-4 { 1e-6 } else { BATCH }
    }
}

fn rows() -> impl Iterator<Item = Row> {
    TABLE.lines().enumerate().map(|(i, text)| Row::read(i + 1, text))
}

/// The batch solver against HiGHS: every row, both drives, three and six rows, held and not.
#[test]
fn the_batch_solver_agrees_with_highs() {
    let (mut held, mut never, mut edge) = (0, 0, 0);
    for row in rows() {
        let answer = Squeezer::new(row.grip.hold()).squeeze(&row.load);
        match (&answer, row.squeeze) {
            (Answer::Held(own), Some(squeeze)) => {
                assert_close(own.squeeze_n, squeeze, if row.near_the_edge() { 1e-5 } else { row.tolerance() }, 0.0);
                held += 1;
            }
            (Answer::Never { direction }, None) => {
                let pushed = -row.load.dot(direction) / row.load.norm();
                assert!(
                    pushed > 0.0 && row.grip.hold().reach(direction, 1.0) * BEYOND / 2.0 <= pushed,
                    "line {}",
                    row.line
                );
                never += 1;
            }
            // This near, a squeeze of a million loads and none are the same answer.
            _ if row.near_the_edge() => edge += 1,
            _ => panic!("line {}: {answer:?} against {:?}", row.line, row.squeeze),
        }
    }
    assert!(held > 1200 && never > 800 && edge < 60, "{held} {never} {edge}");
}

/// The readable program against HiGHS.
#[test]
fn the_linear_program_agrees_with_highs() {
    let (mut held, mut never, mut declined) = (0, 0, 0);
    for row in rows().filter(|row| !row.near_the_edge()).step_by(2) {
        match (program::squeeze(&row.grip.hold(), &row.load), row.squeeze) {
            (Solved::Answer(own), Some(squeeze)) => {
                assert_close(own, squeeze, PROGRAM, 0.0);
                held += 1;
            }
            (Solved::Infeasible, None) => never += 1,
            // A squeeze of a million loads is none.
            (Solved::Answer(own), None) => assert!(own > 1e6 * row.load.norm(), "line {}: {own}", row.line),
            (Solved::Inconclusive(_), _) => declined += 1,
            (own, other) => panic!("line {}: {own:?} against {other:?}", row.line),
        }
    }
    assert!(held > 600 && never > 400, "{held} {never}");
    assert!(declined * 100 < held + never, "{declined} declined");
}

/// Load margin: limit over squeeze, and by a program of its own.
#[test]
fn the_load_margin_agrees_with_highs() {
    let mut compared = 0;
    for row in rows().filter(|row| !row.near_the_edge()) {
        let Some(margin) = row.margin else { continue };
        assert_close(row.limit_n / row.grip.squeeze(&row.load), margin, row.tolerance(), 0.0);
        if compared % 4 == 0
            && let Solved::Answer(own) = program::most_held(&row.grip.hold(), &Wrench::zeros(), &row.load, row.limit_n)
        {
            assert_close(own, margin, PROGRAM, 0.0);
        }
        compared += 1;
    }
    assert!(compared > 1200, "{compared}");
}

/// Least factor on all friction with which the load is held within the limit.
#[test]
fn the_friction_for_holding_agrees_with_highs() {
    let (mut some, mut none) = (0, 0);
    for row in rows().filter(|row| row.factor != "?" && !row.near_the_edge()) {
        let asked: [Asked; 1] = [(row.load, 1.0)];
        let own = holding::factor_needed(&row.grip.hold(), &asked, row.limit_n, 0.0);
        let largest = row.grip.contacts.iter().map(|c| c.mu).fold(0.0, f64::max);
        if row.factor == "-" {
            // The script looks up to a mu of 20.
            assert!(own.is_none_or(|own| own * largest > 20.0 * (1.0 - 1e-9)), "line {}: {own:?}", row.line);
            none += 1;
        } else {
            let factor: f64 = row.factor.parse().unwrap();
            assert_close(own.unwrap_or(f64::INFINITY), factor, 2e-7, 1e-8);
            some += 1;
        }
    }
    assert!(some > 300 && none > 10, "{some} {none}");
}

/// Random fingers about the origin, many of them pressing inward.
fn toss(dice: &mut Dice) -> Grip {
    let count = 2 + dice.pick(5);
    let half_width_mm = if dice.pick(2) == 0 { dice.even(1.0, 12.0) } else { 0.0 };
    let mu = dice.even(0.05, 0.9);
    let contact = |i: usize, dice: &mut Dice| {
        let angle = std::f64::consts::TAU * (i as f64 + dice.even(-0.4, 0.4)) / count as f64;
        let (reach, lean) = (dice.even(20.0, 60.0), dice.even(-25.0, 25.0));
        let touch = touch(reach * angle.cos(), reach * angle.sin(), angle.to_degrees() + 180.0 + lean, mu);
        Contact { half_width_mm, ..touch }
    };
    let contacts = (0..count).map(|i| contact(i, dice)).collect();
    let in_plane = dice.pick(4) == 0;
    Grip {
        contacts,
        frame: frame(dice.even(-9.0, 9.0), dice.even(-9.0, 9.0), 50.0),
        half_height_mm: if in_plane { 0.0 } else { dice.even(0.5, 5.0) },
        pyramid: if in_plane { Pyramid::planar() } else { Pyramid::new([4, 6, 8, 12][dice.pick(4)]).unwrap() },
        drive: if dice.pick(2) == 0 { Drive::Adjustable } else { Drive::Equal },
    }
}

fn any_load(dice: &mut Dice, in_plane: bool) -> Wrench {
    let mut load = Wrench::from_fn(|row, _| if row < 3 { dice.even(-8.0, 8.0) } else { dice.even(-3.0, 3.0) });
    if in_plane {
        [2, 3, 4].into_iter().for_each(|row| load[row] = 0.0);
    }
    load
}

/// `a` is not above `b`; what is infinite is not above what is.
#[track_caller]
fn assert_not_above(a: f64, b: f64) {
    assert!(a <= b * (1.0 + 1e-8) || b.is_infinite(), "{a} is above {b}");
}

/// One solver for load after load gives what a fresh one gives, the forces it names balance the load within the squeeze
/// and the cones, and the direction it names proves that no less will do.
#[test]
fn every_answer_carries_its_proof() {
    let mut dice = Dice::seeded(41);
    let (mut held, mut never) = (0, 0);
    for _ in 0..400 {
        let grip = toss(&mut dice);
        let hold = grip.hold();
        let mut squeezer = Squeezer::new(hold);
        for _ in 0..6 {
            let load = any_load(&mut dice, grip.in_plane());
            let warm = squeezer.squeeze(&load);
            match (&warm, Squeezer::new(hold).squeeze(&load)) {
                (Answer::Held(own), Answer::Held(cold)) => {
                    held += 1;
                    assert_close(own.squeeze_n, cold.squeeze_n, 1e-8, 0.0);
                    assert!(own.residual_n <= 1e-8 * (load.norm() + own.squeeze_n));
                    assert_close(-load.dot(&own.direction), own.squeeze_n, 1e-8, 0.0);
                    assert!(hold.reach(&own.direction, 1.0) <= 1.0 + 1e-9);
                    let mut sum = load;
                    for (force, contact) in own.forces.iter().zip(&grip.contacts) {
                        let most = own.squeeze_n * (1.0 + 1e-9);
                        assert!((0.0..=most).contains(&force.normal_n));
                        if grip.drive == Drive::Equal {
                            assert_close(force.normal_n, own.squeeze_n, 1e-8, 0.0);
                        }
                        assert!(force.tangential_n() <= contact.mu * force.normal_n * (1.0 + 1e-9));
                        let tangent = Vector2::new(contact.normal.y, -contact.normal.x);
                        let f = contact.normal * force.normal_n + tangent * force.along_n;
                        sum[0] += f.x;
                        sum[1] += f.y;
                        sum[2] += force.up_n;
                    }
                    assert!(sum.fixed_rows::<3>(0).norm() <= 1e-7 * (load.norm() + own.squeeze_n));
                }
                (Answer::Never { .. }, Answer::Never { .. }) => never += 1,
                (warm, cold) => panic!("{warm:?} against {cold:?}"),
            }
        }
    }
    assert!(held > 1000 && never > 400, "{held} {never}");
}

#[test]
fn the_laws_of_squeeze() {
    let mut dice = Dice::seeded(7);
    let mut finite = 0;
    for _ in 0..500 {
        let grip = toss(&mut dice);
        let load = any_load(&mut dice, grip.in_plane());
        let squeeze = grip.squeeze(&load);
        finite += usize::from(squeeze.is_finite());
        // It scales with the load.
        let times = dice.even(0.1, 40.0);
        let scaled = grip.squeeze(&(load * times));
        assert!(scaled.is_infinite() == squeeze.is_infinite());
        if squeeze.is_finite() {
            assert_close(scaled, squeeze * times, 1e-8, 0.0);
        }
        // It never rises with friction, bite, pad width, twice the sides, or a finger that may be left out.
        let mut slicker = grip.clone();
        let less = dice.even(0.2, 1.0);
        slicker.contacts.iter_mut().for_each(|c| c.mu *= less);
        assert_not_above(squeeze, slicker.squeeze(&load));
        let lower = Grip { half_height_mm: grip.half_height_mm * dice.even(0.1, 1.0), ..grip.clone() };
        assert_not_above(squeeze, lower.squeeze(&load));
        let mut narrower = grip.clone();
        let less = dice.even(0.0, 1.0);
        narrower.contacts.iter_mut().for_each(|c| c.half_width_mm *= less);
        assert_not_above(squeeze, narrower.squeeze(&load));
        if !grip.in_plane() {
            let finer = Grip { pyramid: Pyramid::new(2 * grip.pyramid.sides()).unwrap(), ..grip.clone() };
            assert_not_above(finer.squeeze(&load), squeeze);
        }
        if grip.contacts.len() < 6 && grip.drive == Drive::Adjustable {
            let mut more = grip.clone();
            more.contacts.push(toss(&mut dice).contacts[0]);
            assert_not_above(more.squeeze(&load), squeeze);
        }
        // A drive that presses all alike never needs less than one that need not.
        let free = Grip { drive: Drive::Adjustable, ..grip.clone() };
        assert_not_above(free.squeeze(&load), squeeze);
        // Turning and moving everything changes nothing.
        let turn = Rotation2::new(dice.even(0.0, 6.3));
        let by = Vector2::new(dice.even(-500.0, 500.0), dice.even(-500.0, 500.0));
        let mut moved = grip.clone();
        moved.contacts.iter_mut().for_each(|c| {
            c.point = turn * c.point + by;
            c.normal = turn * c.normal;
        });
        moved.frame.about = turn * grip.frame.about + by;
        let (f, m) = (turn * Vector2::new(load[0], load[1]), turn * Vector2::new(load[3], load[4]));
        let there = moved.squeeze(&Wrench::new(f.x, f.y, load[2], m.x, m.y, load[5]));
        assert!(there.is_infinite() == squeeze.is_infinite());
        if squeeze.is_finite() {
            assert_close(there, squeeze, 1e-7, 0.0);
        }
    }
    assert!(finite > 200, "{finite}");
}

/// The exact quadratic cone: at every point (normal, along, up) with `|(along, up)| <= mu normal`. Nothing when no squeeze
/// holds the load.
fn exact_squeeze(grip: &Grip, load: &Wrench) -> Option<f64> {
    let l = grip.frame.scale_mm;
    let mut columns: Vec<[Wrench; 3]> = Vec::new();
    let mut of_finger = Vec::new();
    let mut mus = Vec::new();
    for (finger, c) in grip.contacts.iter().enumerate() {
        let t = Vector2::new(c.normal.y, -c.normal.x);
        let ends = if c.half_width_mm > 0.0 { vec![-c.half_width_mm, c.half_width_mm] } else { vec![0.0] };
        let levels = if grip.in_plane() { vec![0.0] } else { vec![-grip.half_height_mm, grip.half_height_mm] };
        for end in &ends {
            for level in &levels {
                let p = c.point + t * *end - grip.frame.about;
                let r = nalgebra::Vector3::new(p.x, p.y, *level) / l;
                let wrench = |f: nalgebra::Vector3<f64>| {
                    let m = r.cross(&f);
                    Wrench::new(f.x, f.y, f.z, m.x, m.y, m.z)
                };
                let up = if grip.in_plane() { nalgebra::Vector3::zeros() } else { nalgebra::Vector3::z() };
                columns.push([
                    wrench(nalgebra::Vector3::new(c.normal.x, c.normal.y, 0.0)),
                    wrench(nalgebra::Vector3::new(t.x, t.y, 0.0)),
                    wrench(up),
                ]);
                of_finger.push(finger);
                mus.push(c.mu);
            }
        }
    }
    let fingers = grip.contacts.len();
    let (points, used) = (columns.len(), if grip.in_plane() { vec![0, 1, 5] } else { (0..6).collect() });
    let size = load.norm();
    let variables = 3 * points + 1;
    let rows = used.len() + fingers + 3 * points;
    let mut a = vec![vec![0.0; variables]; rows];
    let mut b = vec![0.0; rows];
    for (at, &row) in used.iter().enumerate() {
        for (point, three) in columns.iter().enumerate() {
            for (k, column) in three.iter().enumerate() {
                a[at][3 * point + k] = column[row];
            }
        }
        b[at] = -load[row] / size;
    }
    // Each finger's normal forces and the squeeze: their sum less F is nought, or not above it.
    for finger in 0..fingers {
        let row = used.len() + finger;
        for point in (0..points).filter(|&point| of_finger[point] == finger) {
            a[row][3 * point] = 1.0;
        }
        a[row][3 * points] = -1.0;
    }
    // s = (mu normal, along, up) in the quadratic cone: -G x + s = 0.
    for point in 0..points {
        let row = used.len() + fingers + 3 * point;
        a[row][3 * point] = -mus[point];
        a[row + 1][3 * point + 1] = -1.0;
        a[row + 2][3 * point + 2] = -1.0;
    }
    let mut q = vec![0.0; variables];
    q[3 * points] = 1.0;
    let limits = match grip.drive {
        Drive::Adjustable => SupportedConeT::NonnegativeConeT(fingers),
        Drive::Equal => SupportedConeT::ZeroConeT(fingers),
    };
    let mut cones = vec![SupportedConeT::ZeroConeT(used.len()), limits];
    cones.extend((0..points).map(|_| SupportedConeT::SecondOrderConeT(3)));
    let settings = DefaultSettings { verbose: false, ..DefaultSettings::default() };
    let a = CscMatrix::from(&a);
    let mut solver =
        DefaultSolver::new(&CscMatrix::zeros((variables, variables)), &q, &a, &b, &cones, settings).unwrap();
    solver.solve();
    match solver.solution.status {
        SolverStatus::Solved | SolverStatus::AlmostSolved => Some(solver.solution.x[3 * points] * size),
        SolverStatus::PrimalInfeasible | SolverStatus::AlmostPrimalInfeasible => None,
        other => panic!("{other:?} on {:?}", grip.contacts),
    }
}

/// The pyramid never claims what the exact cone denies, asks for at most 1 / cos(pi / F) of friction more, and in the plane
/// is the cone.
#[test]
fn the_pyramid_is_inside_the_exact_cone() {
    let mut dice = Dice::seeded(23);
    let (mut compared, mut in_plane) = (0, 0);
    for _ in 0..300 {
        let grip = toss(&mut dice);
        let load = any_load(&mut dice, grip.in_plane());
        let squeeze = grip.squeeze(&load);
        let Some(exact) = exact_squeeze(&grip, &load).filter(|exact| *exact < 1e4 * load.norm()) else {
            assert!(squeeze > 1e3 * load.norm(), "{squeeze} where the exact cone holds nothing");
            continue;
        };
        // Clarabel stops at a gap of 1e-8; far from 1 its answers have fewer digits.
        assert!(squeeze >= exact * (1.0 - 1e-5), "{squeeze} is below {exact}");
        compared += 1;
        if grip.in_plane() {
            assert_close(squeeze, exact, 1e-5, 0.0);
            in_plane += 1;
        } else {
            // The cone of mu cos(pi / F) lies inside the pyramid of mu.
            let mut smaller = grip.clone();
            let shrink = (std::f64::consts::PI / grip.pyramid.sides() as f64).cos();
            smaller.contacts.iter_mut().for_each(|c| c.mu *= shrink);
            if let Some(above) = exact_squeeze(&smaller, &load) {
                assert!(squeeze <= above * (1.0 + 1e-5) || above > 1e4 * load.norm(), "{squeeze} is above {above}");
            }
        }
    }
    assert!(compared > 100 && in_plane > 15, "{compared} {in_plane}");
}

/// Each point of the envelope by the linear program.
#[test]
fn the_envelope_is_the_linear_program_s() {
    let mut dice = Dice::seeded(5);
    let (mut points, mut none) = (0, 0);
    for _ in 0..60 {
        let grip = toss(&mut dice);
        let hold = grip.hold();
        let weight = any_load(&mut dice, grip.in_plane()) * 0.2;
        let per_unit = [Wrench::new(-0.4, 0.0, 0.0, 0.0, 0.0, 0.0), Wrench::new(0.0, -0.4, 0.0, 0.0, 0.0, 0.0)];
        let limit_n = dice.even(2.0, 60.0);
        let by_program = |deg: f64| {
            let (sin, cos) = deg.to_radians().sin_cos();
            program::most_held(&hold, &weight, &(per_unit[0] * cos + per_unit[1] * sin), limit_n)
        };
        match holding::envelope(&hold, &weight, &per_unit, limit_n, 12) {
            None => {
                none += 1;
                // Not even the weight is held.
                assert!(!matches!(program::squeeze(&hold, &weight), Solved::Answer(n) if n <= limit_n));
            }
            Some(ends) => {
                for (deg, most) in ends {
                    let Solved::Answer(own) = by_program(deg) else {
                        panic!("no program for {deg} of {grip:?}", grip = grip.contacts)
                    };
                    assert_close(most, own, PROGRAM, 1e-6);
                    points += 1;
                }
            }
        }
    }
    assert!(points > 200 && none > 5, "{points} {none}");
}

/// Two pads or pins facing each other along x at -a and a.
fn jaw(a: f64, half_width_mm: f64, mu: f64, com_x: f64, half_height_mm: f64, drive: Drive) -> Grip {
    let contacts = [touch(-a, 0.0, 0.0, mu), touch(a, 0.0, 180.0, mu)].map(|c| Contact { half_width_mm, ..c });
    Grip {
        contacts: contacts.to_vec(),
        frame: frame(com_x, 0.0, a),
        half_height_mm,
        pyramid: if half_height_mm > 0.0 { Pyramid::new(8).unwrap() } else { Pyramid::planar() },
        drive,
    }
}

/// Load W along the faces, the centre of mass off mid-span by q along the squeeze axis: `F = W / (2 mu) (1 + |q| / a)`
/// between pins; between pads of half-width b `max(W / (2 mu), W (a + |q|) / (2 (mu a + b)))`. Statics, derived; with
/// g = 9.81 m/s2.
#[test]
fn a_load_along_the_faces_of_two_fingers() {
    let g = 9.81;
    for (m, mu, q, squeeze) in [(2.0, 0.15, 0.0, 65.400), (2.0, 0.15, 0.4, 91.560), (5.0, 0.2, 1.0, 245.250)] {
        let a = 30.0;
        let pins = jaw(a, 0.0, mu, q * a, 0.0, Drive::Adjustable);
        assert_close(pins.squeeze(&load([0.0, -m * g, 0.0], [0.0; 3], &pins.frame)), squeeze, 1e-9, 0.0);
        for b in [0.0, 0.5, 4.0, 12.0] {
            let pads = jaw(a, b, mu, q * a, 0.0, Drive::Adjustable);
            let w = m * g;
            let by_hand = f64::max(w / (2.0 * mu), w * (a + q * a) / (2.0 * (mu * a + b)));
            assert_close(pads.squeeze(&load([0.0, -w, 0.0], [0.0; 3], &pads.frame)), by_hand, 1e-9, 0.0);
        }
    }
}

/// The hand formula is the program's answer where it applies, to the last digit that counts, and says why elsewhere.
#[test]
fn the_hand_formula_is_recovered_exactly() {
    for drive in [Drive::Adjustable, Drive::Equal] {
        for (w, mu) in [(10.0, 0.15), (123.0, 0.4), (0.3, 0.08)] {
            let grip = jaw(25.0, 6.0, mu, 0.0, 3.0, drive);
            let hold = grip.hold();
            // Along the edge and across the plane: on sides of the pyramid.
            for force in [[0.0, -w, 0.0], [0.0, w, 0.0], [0.0, 0.0, -w], [0.0, 0.0, w]] {
                let load = load(force, [0.0; 3], &grip.frame);
                let by_hand = jaw_formula::squeeze_n(&hold, &load, grip.frame.scale_mm).unwrap();
                assert_close(by_hand, w / (2.0 * mu), 1e-15, 0.0);
                assert_close(grip.squeeze(&load), by_hand, 1e-12, 0.0);
                assert_eq!(jaw_formula::lies(&hold, &load), Some(Lies::AlongFaces));
            }
            // Between two sides the pyramid asks for at most 1 / cos(pi / 8) more.
            let slanting = load([0.0, w * 0.6, w * 0.8], [0.0; 3], &grip.frame);
            let by_hand = jaw_formula::squeeze_n(&hold, &slanting, grip.frame.scale_mm).unwrap();
            let squeeze = grip.squeeze(&slanting);
            assert!(by_hand <= squeeze && squeeze <= by_hand / (std::f64::consts::PI / 8.0).cos());
            let across = load([-w, 0.0, 0.0], [0.0; 3], &grip.frame);
            let why = jaw_formula::squeeze_n(&hold, &across, 25.0).unwrap_err();
            assert!(matches!(why, NoFormula::Across { percent } if (percent - 100.0).abs() < 1e-9));
            assert_eq!(jaw_formula::lies(&hold, &across), Some(Lies::AlongAxis));
            // One finger must give: pressed alike, no squeeze holds a push along the axis.
            assert!(grip.squeeze(&across).is_infinite() == (drive == Drive::Equal));
        }
    }
    let why = |grip: &Grip, force: [f64; 3]| {
        jaw_formula::squeeze_n(&grip.hold(), &load(force, [0.0; 3], &grip.frame), grip.frame.scale_mm).unwrap_err()
    };
    let pads = jaw(25.0, 6.0, 0.2, 0.0, 3.0, Drive::Adjustable);
    let mut other = pads.clone();
    other.contacts[1].mu = 0.3;
    assert_eq!(why(&other, [0.0, 1.0, 0.0]), NoFormula::Friction(0.2, 0.3));
    other = pads.clone();
    other.contacts[1].point.y += 2.0;
    assert!(matches!(why(&other, [0.0, 1.0, 0.0]), NoFormula::NotFacing { off_mm } if (off_mm - 2.0).abs() < 1e-9));
    other = pads.clone();
    other.frame.about.y += 1.5;
    assert!(matches!(why(&other, [0.0, 1.0, 0.0]), NoFormula::OffLine { off_mm } if (off_mm - 1.5).abs() < 1e-9));
    other = pads.clone();
    other.contacts[1].normal = Rotation2::new(0.01) * other.contacts[1].normal;
    assert!(matches!(why(&other, [0.0, 1.0, 0.0]), NoFormula::NotParallel { .. }));
    assert_eq!(why(&jaw(25.0, 0.0, 0.2, 0.0, 3.0, Drive::Adjustable), [0.0, 1.0, 0.0]), NoFormula::NotPads);
    let turned = load([0.0, 1.0, 0.0], [0.0, 0.0, 4.0], &pads.frame);
    assert_eq!(jaw_formula::squeeze_n(&pads.hold(), &turned, 25.0), Err(NoFormula::Turns));
}

/// A flat part on three edge fingers: the weight is shared by the barycentric coordinates of the centre of mass in their
/// triangle, and each finger bears its share by friction alone, so `F >= W lambda / mu`; with a centred squeeze in
/// balance the largest share decides. Statics, derived: equilateral fingers, centre of mass moved toward one of them.
#[test]
fn three_fingers_share_a_weight_by_barycentric_coordinates() {
    let (mu, w, r) = (0.3, 12.0, 40.0);
    for toward in [0.0, 5.0, 12.0] {
        let at = |deg: f64| common::on_disc(r, f64::to_radians(deg), mu);
        let com = Point2::new(toward, 0.0);
        // Points without a height: no finger bears a moment about its own edge.
        let grip = Grip {
            contacts: vec![at(0.0), at(120.0), at(240.0)],
            frame: Frame { about: com, scale_mm: r },
            half_height_mm: 0.0,
            pyramid: Pyramid::new(64).unwrap(),
            drive: Drive::Equal,
        };
        let largest_share = (1.0 + 2.0 * toward / r) / 3.0;
        let squeeze = grip.squeeze(&load([0.0, 0.0, -w], [0.0; 3], &grip.frame));
        assert_close(squeeze, w * largest_share / mu, 1e-6, 0.0);
    }
}

/// Two points cannot carry a centre of mass off the line between them when the part lies flat; pads can.
#[test]
fn pads_carry_what_two_points_cannot() {
    let weight = |grip: &Grip| load([0.0, 0.0, -5.0], [0.0; 3], &grip.frame);
    let with = |half_width: f64| {
        let grip = jaw(30.0, half_width, 0.4, 0.0, 0.0, Drive::Adjustable);
        let frame = Frame { about: Point2::new(0.0, 3.0), ..grip.frame };
        Grip { pyramid: Pyramid::new(8).unwrap(), frame, ..grip }
    };
    let points = with(0.0);
    assert!(points.squeeze(&weight(&points)).is_infinite());
    let pads = with(8.0);
    // W / (2 mu) each at the line 3 mm off the middle: the ends share it 11 : 5, and both stay within the pad.
    assert_close(pads.squeeze(&weight(&pads)), 5.0 / (2.0 * 0.4), 1e-6, 0.0);
}

/// The L-plate (0,0)(120,0)(120,40)(40,40)(40,120)(0,120), 10 mm of 7850 kg/m3 steel, pins at (80, 0) and (80, 40), mu 0.25;
/// g = 9.81 m/s2. Derived by hand from statics: signs of gravity and of an outside acceleration matter.
#[test]
fn the_ell_plate_under_load() {
    let mu = 0.25;
    let grip = Grip {
        contacts: vec![touch(80.0, 0.0, 90.0, mu), touch(80.0, 40.0, 270.0, mu)],
        frame: frame(44.0, 44.0, 87.817994),
        half_height_mm: 0.0,
        pyramid: Pyramid::planar(),
        drive: Drive::Adjustable,
    };
    let w = 0.628 * 9.81;
    let squeeze = |x: f64, y: f64| grip.squeeze(&load([x, y, 0.0], [0.0; 3], &grip.frame));
    assert_close(squeeze(-w, 0.0), 27.106992, 1e-7, 0.0);
    assert_close(squeeze(0.0, -w), 28.339128, 1e-7, 0.0);
    assert_close(squeeze(-12.56, -w), 83.603128, 1e-7, 0.0);
    assert_close(squeeze(12.56, -w), 39.246232, 1e-7, 0.0);
    let asked: [Asked; 1] = [(load([-w, 0.0, 0.0], [0.0; 3], &grip.frame), 1.0)];
    let factor = holding::factor_needed(&grip.hold(), &asked, 60.0, 0.0).unwrap();
    assert_close(factor * mu, 0.112946, 0.0, 1e-6);
}

/// The largest squeeze that still holds a load when all fingers are pressed alike, against a linear program of its own; the
/// least never exceeds it.
#[test]
fn pressed_alike_a_squeeze_may_be_too_hard() {
    let mut dice = Dice::seeded(77);
    let (mut bounded, mut unbounded) = (0, 0);
    for _ in 0..600 {
        let grip = Grip { drive: Drive::Equal, ..toss(&mut dice) };
        let hold = grip.hold();
        let load = any_load(&mut dice, grip.in_plane());
        let least = grip.squeeze(&load);
        if least.is_infinite() {
            continue;
        }
        let most = Squeezer::new(hold).most(&load).expect("a held load has a largest squeeze");
        assert!(most >= least * (1.0 - 1e-8), "{most} is below {least}");
        let Solved::Answer(other) = program::most_squeeze(&hold, &load, 1e5 * load.norm()) else { continue };
        assert_eq!(most.is_infinite(), other.is_infinite(), "{most} {other}");
        if most.is_finite() {
            assert_close(most, other, 1e-6, 0.0);
            bounded += 1;
        } else {
            unbounded += 1;
        }
    }
    assert!(bounded > 15 && unbounded > 100, "{bounded} {unbounded}");
}

/// Two pins below a plate and one above press alike: their own forces leave F upward, so a push of 30 N down takes exactly
/// 30 N each and one of 3 N exactly 3 N. No one squeeze holds both. Statics, derived.
#[test]
fn one_squeeze_has_to_hold_every_case() {
    let mu = 0.2;
    let grip = Grip {
        contacts: vec![touch(-20.0, -20.0, 90.0, mu), touch(20.0, -20.0, 90.0, mu), touch(0.0, 20.0, 270.0, mu)],
        frame: frame(0.0, 0.0, 40.0),
        half_height_mm: 0.0,
        pyramid: Pyramid::planar(),
        drive: Drive::Equal,
    };
    let push = |n: f64| Case {
        name: format!("{n} N down"),
        loads: vec![Load { wrench: load([0.0, -n, 0.0], [0.0; 3], &grip.frame), direction_deg: None }],
        squeeze_left: 1.0,
    };
    let limit = Some(Limit { squeeze_n: 100.0, by: LimitedBy::Hand });
    let hold = grip.hold();
    let alone = Holding::of(&hold, &[push(3.0)], limit);
    assert!(alone.held());
    assert_close(alone.squeeze_n().unwrap(), 3.0, 1e-9, 0.0);
    let cases = [push(30.0), push(3.0)];
    let both = Holding::of(&hold, &cases, limit);
    assert!(!both.held() && both.cases[0].held && !both.cases[1].held);
    assert_close(both.cases[1].lets_go_above_n.unwrap(), 3.0, 1e-9, 0.0);
    assert_eq!(both.load_margin(), Some(0.0));
    assert_eq!(both.doubts(&hold, &cases), []);
    // Each finger by itself holds both.
    let free = Grip { drive: Drive::Adjustable, ..grip.clone() };
    assert!(Holding::of(&free.hold(), &cases, limit).held());
}

/// Newton and Euler by hand: `f = m (g ghat - a) + f_ext`, `m_z = -J alpha` plus the moment of f_ext about the centre of
/// mass, all times the safety factor; J of the L-plate above is 1.453611e-3 kg m2, its centre of mass at (44, 44).
#[test]
fn a_load_case_becomes_wrenches() {
    let body = Body { mass_kg: 0.628, polar_kg_m2: 1.453611e-3, com_mm: [44.0, 44.0] };
    let scale = 50.0;
    let case = LoadCase {
        gravity: [0.0, 3.0, -4.0],
        acceleration_m_s2: [1.0, -2.0, 0.5],
        angular_acceleration_rad_s2: 100.0,
        force_n: [0.0, -6.0, 2.0],
        at_mm: [54.0, 40.0, 3.0],
        safety: 1.5,
        ..LoadCase::default()
    };
    let loads = case.loads(&body, scale);
    assert_eq!(loads.len(), 1);
    let w = &loads[0].wrench;
    let (m, g, s) = (0.628, 9.80665, 1.5);
    assert_close(w[0], -(s * m), 1e-12, 0.0);
    assert_close(w[1], s * (m * (0.6 * g + 2.0) - 6.0), 1e-12, 0.0);
    assert_close(w[2], s * (m * (-0.8 * g - 0.5) + 2.0), 1e-12, 0.0);
    // r = (10, -4, 3) mm: r x f = (-4 * 2 - 3 * -6, -10 * 2, 10 * -6) N mm; J alpha = 145.3611 N mm against the turning.
    assert_close(w[3] * scale, s * 10.0, 1e-12, 0.0);
    assert_close(w[4] * scale, s * -20.0, 1e-12, 0.0);
    assert_close(w[5] * scale, s * (-60.0 - 145.3611), 1e-9, 0.0);
    assert!(case.needs_mass() && case.out_of_plane() == Some("gravity"));

    // Any direction: sixteen corners of the polygon about the circle, so that the middle of each side is at 8 m/s2.
    let stop = LoadCase { gravity: [0.0; 3], any_direction_m_s2: 8.0, ..LoadCase::default() };
    let corners: Vec<_> = stop.loads(&body, scale).iter().map(|load| load.wrench).collect();
    assert_eq!(corners.len(), 16);
    for (i, a) in corners.iter().enumerate() {
        let middle = (a + corners[(i + 1) % 16]) / 2.0;
        assert_close(middle.norm(), m * 8.0, 1e-12, 0.0);
        assert!(a.norm() > m * 8.0);
    }
    // It pushes the part the other way than it is accelerated.
    assert!(corners[0][0] < 0.0 && corners[4][1] < 0.0);
    let push = LoadCase { gravity: [0.0; 3], force_n: [1.0, 0.0, 0.0], ..LoadCase::default() };
    assert!(!push.needs_mass() && push.out_of_plane().is_none());
}
