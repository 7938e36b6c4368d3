//! Moment labels: the regions in which the fingers turn the part one way only.

use super::super::super::state::{Reading, State};
use super::super::outline::Pen;
use super::super::reading::escape_words;
use super::super::sheet::Depth;
use super::Shown;
use crate::mechanics::Verdict;
use crate::mechanics::labels::{Label, Labels, Sign};
use nalgebra::Point2;

const FREE: (u16, u16) = (8, 4);
/// Points are looked for in a box so many times as large as the part.
const FAR: f64 = 20.0;

pub(super) fn picture<'a>(state: &'a State, reading: &'a Reading) -> Shown<'a> {
    let scene = &state.order.scene;
    let labels = Labels::of(&reading.grasp.contacts);
    let told = vec![told(state, reading, &labels)];
    let paint = move |paper: super::Paper| {
        let mut pen = Pen::on_part(state, paper.size, FREE);
        pen.part(scene);
        pen.labels(&labels);
        pen.fingers(&reading.grasp, &scene.setup().hand);
        pen.sheet
    };
    Shown { told, paint: Box::new(paint) }
}

fn told(state: &State, reading: &Reading, labels: &Labels) -> Vec<String> {
    let part = state.order.scene.part();
    let verdict = reading.assessment.verdict;
    if verdict == Verdict::Closed {
        return vec!["closed, so no point has a label: about each the fingers turn the part both ways".to_owned()];
    }
    let (low, high) = part.outline().bounds();
    let far = (high - low) * FAR;
    let region = |sign: Sign| labels.region(sign, low - far, high + far);
    let (plus, minus) = (region(Sign::Plus), region(Sign::Minus));
    let word = verdict.word();
    let mut told = if plus.is_empty() && minus.is_empty() {
        vec![format!("{word}, yet no point near the part has a label")]
    } else {
        let no_moment = |q: &Point2<f64>| labels.at(*q) == Some(Label::Both);
        let none = plus.iter().chain(&minus).all(no_moment).then_some("0 no turning at all");
        let signs = [(plus, "+ counter-clockwise only"), (minus, "- clockwise only")];
        let signs = signs.into_iter().filter(|(region, _)| none.is_none() && !region.is_empty());
        std::iter::once(word).chain(none).chain(signs.map(|(_, text)| text)).map(str::to_owned).collect()
    };
    told.extend(reading.assessment.escape.as_ref().map(|escape| escape_words(escape, part)));
    told
}

/// A label's own sign; a point through which every force goes has both.
fn sign_of(label: Label) -> char {
    match label {
        Label::Plus => '+',
        Label::Minus => '-',
        Label::Both => '0',
    }
}

impl Pen {
    /// Every other cell of a region has its sign, so that it is told from the outline's own; a region thinner than a cell
    /// is drawn as a curve.
    fn labels(&mut self, labels: &Labels) {
        let (columns, rows) = self.sheet.size();
        let style_of = |pen: &Self, label| match label {
            Label::Plus => pen.look.good(),
            Label::Minus | Label::Both => pen.look.bad(),
        };
        let mut filled = [false; 2];
        for row in 0..rows {
            for column in (row % 2..columns).step_by(2) {
                let Some(label) = labels.at(self.fit.point(column, row)) else { continue };
                filled[usize::from(label == Label::Minus)] = true;
                self.sheet.put(column, row, sign_of(label), Depth::Fill, style_of(self, label));
            }
        }
        let (low, high) = (self.fit.point(-1, rows), self.fit.point(columns, -1));
        for (sign, label) in [(Sign::Plus, Label::Plus), (Sign::Minus, Label::Minus)] {
            let region = labels.region(sign, low, high);
            if filled[usize::from(label == Label::Minus)] || region.is_empty() {
                continue;
            }
            let both = region.iter().all(|q| labels.at(*q) == Some(Label::Both));
            let label = if both { Label::Both } else { label };
            let style = style_of(self, label);
            for (i, a) in region.iter().enumerate() {
                let b = region[(i + 1) % region.len()];
                let ink = super::super::sheet::Ink::Sign(sign_of(label));
                self.sheet.stroke(self.fit.cell(*a), self.fit.cell(b), ink, Depth::Curve, style);
            }
        }
    }
}
