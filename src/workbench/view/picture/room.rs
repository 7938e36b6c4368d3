//! Where each finger may move along its stretch, the others staying.

use super::super::super::state::{Reading, State};
use super::super::number;
use super::super::outline::{Pen, number_sign};
use super::super::sheet::{Depth, Ink};
use super::Shown;
use crate::hand::{self, Closing};
use crate::mechanics::Verdict;
use crate::part::Edge;
use crate::search::leeway::{self, EndedBy, Leeway};

const FREE: (u16, u16) = (4, 2);

pub(super) fn picture<'a>(state: &'a State, reading: &'a Reading) -> Shown<'a> {
    let scene = &state.order.scene;
    let leeway = leeway::leeway(scene, &reading.grasp);
    let parallel = scene.setup().hand.closing == Closing::Parallel;
    let words = match (&leeway, reading.assessment.verdict) {
        (Some(_), _) if parallel => "mm, both together".to_owned(),
        (Some(_), _) => "mm, one at a time".to_owned(),
        (None, Verdict::Closed) if reading.grasp.fits() => "not known".to_owned(),
        (None, Verdict::Closed) => "none, a finger stands where it may not".to_owned(),
        (None, verdict) => format!("none, the grasp is {}", verdict.word()),
    };
    let own = leeway.iter().flatten().enumerate();
    let intervals = own.map(|(finger, own)| format!("{} {}", finger + 1, interval(own))).collect();
    let stretches = reading.grasp.spots.iter().enumerate().filter_map(|(finger, spot)| {
        let stretch = hand::stretch_around(scene.stretches(), spot.edge, spot.along_mm)?;
        Some(format!("{} fits {} to {}", finger + 1, number::at(stretch.from_mm), number::at(stretch.to_mm)))
    });
    let told = vec![vec![words], intervals, stretches.collect()];
    let paint = move |paper: super::Paper| {
        let mut pen = Pen::on_part(state, paper.size, FREE);
        pen.part(scene);
        pen.fingers(&reading.grasp, &scene.setup().hand);
        for (finger, (spot, own)) in reading.grasp.spots.iter().zip(leeway.iter().flatten()).enumerate() {
            if let Some(edge) = scene.part().outline().edge(spot.edge) {
                pen.along(edge, own, number_sign(finger));
            }
        }
        for contact in &reading.grasp.contacts {
            pen.sign(contact.point, 'o', Depth::Finger, pen.look.finger());
        }
        pen.sheet
    };
    Shown { told, paint: Box::new(paint) }
}

/// Both ends in mm from the edge's first vertex, with what ends them where it is not the stretch.
fn interval(leeway: &Leeway) -> String {
    let why = |by: EndedBy| match by {
        EndedBy::Stretch => String::new(),
        EndedBy::Closure => " closure".to_owned(),
        EndedBy::Finger(finger) => format!(" finger {}", finger + 1),
    };
    let end = |end: &leeway::End| format!("{}{}", number::at(end.along_mm), why(end.by));
    format!("{} to {}", end(&leeway.back), end(&leeway.on))
}

impl Pen {
    /// The piece of an edge a finger has to itself, drawn thick: its number in every cell, over the face of a pad.
    fn along(&mut self, edge: &Edge, leeway: &Leeway, sign: char) {
        let (from, to) = (leeway.back.along_mm, leeway.on.along_mm);
        // Short chords on an arc; a straight edge is one.
        let chords = if edge.arc().is_some() { 64 } else { 1 };
        let at = |k: i32| self.fit.cell(edge.point_at(from + (to - from) * f64::from(k) / f64::from(chords)));
        let points: Vec<_> = (0..=chords).map(at).collect();
        for pair in points.windows(2) {
            self.sheet.stroke(pair[0], pair[1], Ink::Sign(sign), Depth::Finger, self.look.finger());
        }
    }
}
