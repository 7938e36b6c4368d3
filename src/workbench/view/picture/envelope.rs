//! The accelerations held in each direction of the plane, as a curve about the centre of mass.

use super::super::super::action::{Action, key_of};
use super::super::super::state::{Reading, State};
use super::super::bars::cut;
use super::super::number;
use super::super::outline::{Pen, number_sign};
use super::super::sheet::Depth;
use super::Shown;
use crate::file::shown;
use crate::mechanics::LoadCase;
use crate::mechanics::load::GRAVITY_M_S2;
use nalgebra::{Point2, Vector2, Vector3};

const FREE: (u16, u16) = (4, 2);
/// Directions of the curve.
pub(super) const DIRECTIONS: usize = 72;
/// Longest name of a case.
const NAME: usize = 14;
/// Accelerations below this are none, m/s2.
const NOTHING: f64 = 1e-9;

pub(super) fn picture<'a>(state: &'a State, reading: &'a Reading) -> Shown<'a> {
    let scene = &state.order.scene;
    let held = scene.envelope(&reading.grasp, DIRECTIONS);
    let marks = marks(&state.setup().loads);
    let mut told = Vec::new();
    match &held {
        Some(held) => {
            told.push(largest_and_least(held));
            let first = state.setup().loads.first();
            let limit = scene.limit(&reading.grasp).map_or(String::new(), |limit| number::given(limit.squeeze_n));
            let safety = number::given(first.map_or(1.0, |case| case.safety));
            told.push(vec![format!("at {limit} N each"), format!("weight included, S {safety}")]);
        }
        None => told.push(vec![unknown(state, reading)]),
    }
    told.push(
        state.setup().loads.iter().zip(&marks).enumerate().map(|(i, (case, mark))| named(i, case, mark)).collect(),
    );
    let paint = move |paper: super::Paper| {
        let mut pen = Pen::on_part(state, paper.size, FREE);
        let com = scene.part().com();
        if state.view.zoom() > 1.0 {
            pen.fit = pen.fit.nearer(1.0, com);
        }
        pen.part(scene);
        for contact in &reading.grasp.contacts {
            pen.sign(contact.point, 'o', Depth::Finger, pen.look.finger());
        }
        pen.accelerations(com, held.as_deref().unwrap_or_default(), &marks, state.view.zoom());
        pen.sheet
    };
    Shown { told, paint: Box::new(paint) }
}

/// Why nothing is known, and the mend.
fn unknown(state: &State, reading: &Reading) -> String {
    let scene = &state.order.scene;
    if scene.part().mass().is_none() {
        return match scene.part().thickness_mm() {
            Some(_) => format!("not known: the part has no mass; {} lists densities", key_of(Action::OpenMaterials)),
            None => "not known: the part file gives neither mass nor thickness".to_owned(),
        };
    }
    if scene.limit(&reading.grasp).is_none() {
        return format!("not known without a force limit: {} types one", key_of(Action::LimitEnter));
    }
    if scene.part().thickness_mm().is_none() {
        return "not known: its weight pushes out of the plane, and the part file gives no thickness".to_owned();
    }
    "none: at the force limit not even the weight is held".to_owned()
}

fn toward(deg: f64) -> Vector2<f64> {
    let (sin, cos) = deg.to_radians().sin_cos();
    Vector2::new(cos, sin)
}

fn largest_and_least(held: &[(f64, f64)]) -> Vec<String> {
    let pick = |better: fn(f64, f64) -> bool| {
        held.iter().copied().reduce(|best, own| if better(own.1, best.1) { own } else { best })
    };
    let size = |m_s2: f64| if m_s2.is_finite() { format!("{} m/s2", number::mm(m_s2)) } else { "any".to_owned() };
    let say =
        |word: &str, (deg, m_s2): (f64, f64)| format!("{word} {} toward {} deg", size(m_s2), number::degrees(deg));
    let (least, most) = (pick(|a, b| a < b), pick(|a, b| a > b));
    least.map(|least| say("least", least)).into_iter().chain(most.map(|most| say("most", most))).collect()
}

/// A load case as an acceleration in the plane beside the first case's weight, and the radius of "any direction"; m/s2.
struct Mark {
    at: Vector2<f64>,
    radius: f64,
}

/// What a case's weight and acceleration push in the plane, per kilogram, safety factor included.
fn push(case: &LoadCase, moved: bool) -> Vector2<f64> {
    let down = Vector3::from(case.gravity).try_normalize(f64::MIN_POSITIVE).unwrap_or_default() * GRAVITY_M_S2;
    let [x, y, _] = if moved { case.acceleration_m_s2 } else { [0.0; 3] };
    (down.xy() - Vector2::new(x, y)) * case.safety
}

fn marks(cases: &[LoadCase]) -> Vec<Mark> {
    let Some(first) = cases.first() else { return Vec::new() };
    // The curve is for S (g - a) with the first case's S and g; another case's push is that of the a at which both agree.
    let weight = push(first, false);
    let mark = |case: &LoadCase| Mark {
        at: (weight - push(case, true)) / first.safety,
        radius: case.any_direction_m_s2 * case.safety / first.safety,
    };
    cases.iter().map(mark).collect()
}

fn named(number: usize, case: &LoadCase, mark: &Mark) -> String {
    let size = mark.at.norm() + mark.radius;
    let size = if size > NOTHING { number::mm(size) } else { "none".to_owned() };
    format!("{} \"{}\" {size}", number + 1, cut(&shown(&case.name), NAME))
}

impl Pen {
    /// The curve and the marks of the cases in a scale of their own, as large as the sheet allows about the centre of mass.
    fn accelerations(&mut self, com: Point2<f64>, held: &[(f64, f64)], marks: &[Mark], zoom: f64) {
        let own = |deg: f64, m_s2: f64| Point2::from(toward(deg) * m_s2);
        let finite = held.iter().filter(|end| end.1.is_finite()).map(|end| own(end.0, end.1));
        let marked = marks.iter().flat_map(|mark| {
            let r = mark.radius;
            [(r, 0.0), (-r, 0.0), (0.0, r), (0.0, -r)].map(|(x, y)| Point2::from(mark.at + Vector2::new(x, y)))
        });
        let Some(per_mm) = self.unit_per_mm(com, finite.chain(marked)) else { return };
        let (part, middle) = (self.fit, self.fit.rounded(com));
        self.fit = part.about(com, per_mm / zoom);
        // Where any acceleration is held the curve leaves the picture.
        let (columns, rows) = self.sheet.size();
        let beyond = 4.0 * self.fit.cell_mm().0 * f64::from(columns.max(2 * rows));
        let curve: Vec<_> = held.iter().map(|&(deg, m_s2)| own(deg, m_s2.min(beyond))).collect();
        self.curve(&curve, '*', Depth::Curve, self.look.cone());
        for mark in marks.iter().filter(|mark| mark.radius > NOTHING) {
            self.circle(Point2::from(mark.at), mark.radius, Some(':'), Depth::Curve, self.look.plain());
        }
        for (number, mark) in marks.iter().enumerate() {
            if mark.at.norm() + mark.radius > NOTHING {
                let at = self.fit.rounded(Point2::from(mark.at + Vector2::new(mark.radius, 0.0)));
                // Beside the centre of mass, not on it.
                let column = if at == middle { at.0.saturating_add(1) } else { at.0 };
                self.sheet.put(column, at.1, number_sign(number), Depth::Finger, self.look.title());
            }
        }
        self.scale_bar("m/s2");
        self.fit = part;
    }

    /// The scale in which all points fit on the sheet about a point of the part; nothing when all are at the middle.
    fn unit_per_mm(&self, about: Point2<f64>, points: impl Iterator<Item = Point2<f64>>) -> Option<f64> {
        let (columns, rows) = self.sheet.size();
        let middle = self.fit.cell(about);
        let (column_mm, row_mm) = self.fit.cell_mm();
        let mut per_mm = 0.0_f64;
        for point in points {
            let across = if point.x > 0.0 { f64::from(columns - 1) - middle.0 } else { middle.0 };
            let up = if point.y > 0.0 { middle.1 } else { f64::from(rows - 1) - middle.1 };
            for (size, room_mm) in [(point.x.abs(), across * column_mm), (point.y.abs(), up * row_mm)] {
                if size > NOTHING {
                    per_mm = per_mm.max(size / room_mm.max(column_mm / 2.0));
                }
            }
        }
        (per_mm > 0.0 && per_mm.is_finite()).then_some(per_mm)
    }
}
