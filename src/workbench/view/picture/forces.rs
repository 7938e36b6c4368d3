//! The finger forces that hold a load case, as arrows at the contacts.

use super::super::super::action::{Action, key_of};
use super::super::super::state::{Reading, State};
use super::super::bars::cut;
use super::super::holding::held_word;
use super::super::number;
use super::super::outline::{Pen, number_sign};
use super::super::sheet::Depth;
use super::Shown;
use crate::file::shown;
use crate::mechanics::squeeze::FingerForce;
use crate::mechanics::{CaseHolding, Contact};
use nalgebra::Vector2;

/// Longest name of a case.
const NAME: usize = 18;
/// Columns and rows left free around the part for the arrows.
const FREE: (u16, u16) = (10, 5);
/// Part of the picture's width or height that the longest arrow takes at most.
const LONGEST: f64 = 0.3;
/// Fewest rows or columns of the longest arrow; where there is less room its tail is cut off.
const SHORTEST: f64 = 3.0;
/// Forces below this are not told, N.
const NOTHING_N: f64 = 0.005;

pub(super) fn picture<'a>(state: &'a State, reading: &'a Reading) -> Shown<'a> {
    let scene = &state.order.scene;
    let holding = reading.assessment.holding.as_ref();
    let at =
        holding.map_or(0, |holding| state.view.case.filter(|c| *c < holding.cases.len()).unwrap_or(holding.governing));
    let case = holding.and_then(|holding| holding.cases.get(at));
    let told = match (holding, case) {
        (Some(holding), Some(case)) => {
            let forces = if case.forces.is_empty() { vec![no_forces(case).to_owned()] } else { list(&case.forces) };
            let mut told = vec![about(case), forces, Vec::new()];
            if let Some(deg) = case.direction_deg {
                told[2].push(format!("worst when accelerated toward {} deg", number::degrees(deg)));
            }
            let left = state.setup().loads.get(at).map_or(1.0, |load| load.squeeze_left);
            if left < 1.0 {
                told[2].push(format!("with the {} % of the squeeze that are left", number::given(left * 100.0)));
            }
            if at == holding.governing {
                told[2].push("asks most".to_owned());
            }
            if holding.cases.len() > 1 {
                told[2].push(format!("case {} of {}: {} next", at + 1, holding.cases.len(), key_of(Action::NextSide)));
            }
            told
        }
        _ if state.loads.is_empty() => {
            let add = key_of(Action::OpenLoads);
            vec![vec![format!("no load case yet: {add} adds one, and the forces that hold it are drawn here")]]
        }
        _ => {
            let list = key_of(Action::OpenLoads);
            vec![vec![format!("no load case is in force: {list} lists them and brings them back")]]
        }
    };
    let forces = case.map_or(&[][..], |case| &case.forces);
    let paint = move |paper: super::Paper| {
        let mut pen = Pen::on_part(state, paper.size, FREE);
        pen.part(scene);
        if forces.len() == reading.grasp.contacts.len() {
            pen.forces(&reading.grasp.contacts, forces);
        } else {
            pen.fingers(&reading.grasp, &scene.setup().hand);
        }
        pen.sheet
    };
    Shown { told, paint: Box::new(paint) }
}

/// The case: its name, its squeeze, whether it is held.
fn about(case: &CaseHolding) -> Vec<String> {
    let squeeze = case.squeeze_n.map_or(String::new(), |n| format!(" {} N each,", number::mm(n)));
    vec![format!("\"{}\"{squeeze} {}", cut(&shown(&case.name), NAME), held_word(case))]
}

fn no_forces(case: &CaseHolding) -> &'static str {
    if case.unsure {
        "the solvers could not prove a squeeze, so there are no forces to draw"
    } else {
        "no squeeze holds it, so there are no forces to draw"
    }
}

/// The forces finger by finger.
fn list(forces: &[FingerForce]) -> Vec<String> {
    let any_up = forces.iter().any(|force| force.up_n.abs() >= NOTHING_N);
    let of = |(finger, force): (usize, &FingerForce)| {
        let [normal, along, up] = [force.normal_n, force.along_n, force.up_n].map(number::at);
        let up = if any_up { format!(" {up} up") } else { String::new() };
        format!("{} {normal} in {along} along{up}", finger + 1)
    };
    forces.iter().enumerate().map(of).collect()
}

/// A force in the part plane, N.
fn in_plane(contact: &Contact, force: &FingerForce) -> Vector2<f64> {
    let tangent = Vector2::new(contact.normal.y, -contact.normal.x);
    contact.normal * force.normal_n + tangent * force.along_n
}

impl Pen {
    /// Each force as an arrow that ends at its contact, the finger's number at its tail.
    fn forces(&mut self, contacts: &[Contact], forces: &[FingerForce]) {
        let forces: Vec<Vector2<f64>> = contacts.iter().zip(forces).map(|(c, f)| in_plane(c, f)).collect();
        let mm_per_n = self.longest_per_n(contacts, &forces);
        let style = self.look.finger();
        let (columns, rows) = self.sheet.size();
        for (finger, (contact, force)) in contacts.iter().zip(&forces).enumerate() {
            let tip = self.fit.rounded(contact.point);
            if !(0..columns).contains(&tip.0) || !(0..rows).contains(&tip.1) {
                continue;
            }
            let tail = contact.point - force * mm_per_n;
            let end = self.fit.rounded(tail);
            if force.norm() >= NOTHING_N && end != tip {
                self.arrow(tail, contact.point, Depth::Finger, style);
            } else {
                self.sheet.put(tip.0, tip.1, 'o', Depth::Finger, style);
            }
            // A force too small for an arrow leaves the number beside its contact, outside.
            let step = self.fit.step(-contact.normal);
            let beside = (tip.0 + step.0.round() as i32, tip.1 + step.1.round() as i32);
            let at = if end == tip { beside } else { end };
            let at = (at.0.clamp(0, columns - 1), at.1.clamp(0, rows - 1));
            self.sheet.put(at.0, at.1, number_sign(finger), Depth::Finger, style);
        }
    }

    /// Millimetres of arrow to a newton: the longest reaches over a good part of the picture and no arrow out of it.
    fn longest_per_n(&self, contacts: &[Contact], forces: &[Vector2<f64>]) -> f64 {
        let (columns, rows) = self.sheet.size();
        let (column_mm, row_mm) = self.fit.cell_mm();
        let (mut most, mut least) = (f64::INFINITY, 0.0_f64);
        for (contact, force) in contacts.iter().zip(forces) {
            let tip = self.fit.cell(contact.point);
            let sides = [(tip.0, columns, force.x, column_mm), (tip.1, rows, -force.y, row_mm)];
            let mut cells = 0.0_f64;
            for (at, size, way, cell_mm) in sides {
                // Cells that a millimetre to a newton takes this way, and the room behind the contact.
                let long = way / cell_mm;
                let room = if long > 0.0 { at } else { f64::from(size - 1) - at };
                let room = room.min(f64::from(size) * LONGEST);
                if long.abs() > 0.0 && room >= 0.0 {
                    most = most.min(room / long.abs());
                }
                cells = cells.max(long.abs());
            }
            least = least.max(cells);
        }
        let shortest = if least > 0.0 { SHORTEST / least } else { 0.0 };
        if most.is_finite() { most.max(shortest) } else { shortest }
    }
}
