//! Quality and squeeze over the friction coefficient.

use super::super::super::state::{Reading, State};
use super::super::number;
use super::super::sheet::{Depth, Sheet};
use super::{Paper, Shown};
use crate::mechanics::assess;
use crate::mechanics::holding::{all_loads, common_squeeze_n};
use crate::mechanics::{Verdict, Wrenches, quality};
use crate::search::Scene;

/// Columns of the numbers at the left.
const MARGIN: i32 = 7;
/// Rows of letters and numbers below, and that of the verdicts.
const BELOW: i32 = 3;
/// The squeeze at the top over the one at the setup's mu, or over the limit.
const TALLER: f64 = 1.5;

/// One column.
struct Sample {
    quality: f64,
    verdict: Verdict,
    squeeze_n: Option<f64>,
}

fn sample(scene: &Scene, wrenches: &Wrenches, mu: f64) -> Sample {
    let scaled = assess::scaled_to(wrenches, scene.setup().friction.mu, mu);
    let score = quality::planar(&scaled);
    let verdict = Verdict::of(&scaled, &score);
    let squeeze_n = if scene.cases().is_empty() {
        None
    } else {
        common_squeeze_n(&scene.hold(&scaled), &all_loads(scene.cases()), f64::INFINITY)
    };
    let quality = if verdict == Verdict::Closed { score.signed_quality } else { 0.0 };
    Sample { quality, verdict, squeeze_n }
}

/// A value of friction worth a letter.
struct Mark {
    letter: char,
    word: &'static str,
    mu: f64,
}

fn marks(state: &State, reading: &Reading) -> Vec<Mark> {
    let friction = &state.setup().friction;
    let all = [
        ('M', "mu", Some(friction.mu)),
        ('X', "needed", reading.assessment.friction_needed),
        ('L', "low", friction.low),
        ('N', "nominal", friction.nominal),
        ('H', "high", friction.high),
        ('S', "sliding", friction.sliding),
    ];
    all.into_iter().filter_map(|(letter, word, mu)| Some(Mark { letter, word, mu: mu? })).collect()
}

pub(super) fn picture<'a>(state: &'a State, reading: &'a Reading) -> Shown<'a> {
    let scene = &state.order.scene;
    let wrenches = scene.wrenches(&reading.grasp);
    let own_mu = state.setup().friction.mu;
    let last_mu = (1.5 * own_mu).max(1.0);
    let marks = marks(state, reading);
    // Quality never falls with friction, so its largest value is at the end.
    let top = sample(scene, &wrenches, last_mu);
    let limit_n = scene.limit(&reading.grasp).map(|limit| limit.squeeze_n);
    let here_n = sample(scene, &wrenches, own_mu).squeeze_n.or(top.squeeze_n);
    let top_n = here_n.map(|here_n| TALLER * limit_n.map_or(here_n, |limit_n| limit_n.max(here_n)));
    let mut told = vec![vec![format!("* quality to {}", number::quality(top.quality))]];
    if let Some(top_n) = top_n {
        told[0].push(format!("s squeeze to {} N each", number::mm(top_n)));
    } else if !scene.cases().is_empty() {
        told[0].push("no squeeze holds the loads".to_owned());
    }
    let value = |mark: &Mark| match mark.letter {
        // Closed at every mu above nought.
        'X' if mark.mu < 5e-5 => "0+".to_owned(),
        _ => number::mu(mark.mu),
    };
    let mut named: Vec<String> =
        marks.iter().map(|mark| format!("{} {} {}", mark.letter, mark.word, value(mark))).collect();
    if reading.assessment.friction_needed.is_none() {
        named.push("no friction will do".to_owned());
    }
    told.push(named);
    told.push(vec!["= closed".to_owned(), ". open".to_owned(), "~ marginal".to_owned()]);
    let paint = move |paper: Paper| {
        let mut sheet = Sheet::new(paper.size.0, paper.size.1);
        let (columns, rows) = sheet.size();
        let (width, height) = (columns - MARGIN, rows - BELOW);
        if width < 8 || height < 2 {
            return sheet;
        }
        let look = paper.look;
        let per_column = last_mu / f64::from(width - 1);
        let row_of = |share: f64| ((1.0 - share) * f64::from(height - 1)).round() as i32;
        let braille = look.marker == super::super::super::look::Marker::Braille;
        for column in 0..width {
            let own = sample(scene, &wrenches, per_column * f64::from(column));
            let x = MARGIN + column;
            let strip = match own.verdict {
                Verdict::Closed => '=',
                Verdict::Open => '.',
                Verdict::Marginal => '~',
            };
            sheet.put(x, height, strip, Depth::Edge, look.plain());
            let share_n = own.squeeze_n.zip(top_n).map(|(n, top_n)| n / top_n).filter(|share| *share <= 1.0);
            if let Some(share) = share_n {
                sheet.put(x, row_of(share), 's', Depth::Edge, look.plain());
            }
            if own.verdict == Verdict::Closed && top.quality > 0.0 {
                let share = (own.quality / top.quality).clamp(0.0, 1.0);
                if braille {
                    let dot = ((1.0 - share) * f64::from(4 * height - 1)).round() as i32;
                    sheet.dot(2 * x, dot, Depth::Curve, look.cone());
                    sheet.dot(2 * x + 1, dot, Depth::Curve, look.cone());
                } else {
                    sheet.put(x, row_of(share), '*', Depth::Curve, look.cone());
                }
            }
        }
        let divider = look.divider().chars().next().unwrap_or('|');
        (0..height).for_each(|row| sheet.put(MARGIN - 1, row, divider, Depth::Body, look.dim()));
        sheet.write(0, 0, &number::quality(top.quality), Depth::Finger, look.dim());
        sheet.write(0, height - 1, "0", Depth::Finger, look.dim());
        for mark in marks.iter().rev() {
            let column = (mark.mu / per_column).round().min(1e6) as i32;
            if column < width {
                sheet.put(MARGIN + column, height + 1, mark.letter, Depth::Finger, look.title());
            }
        }
        for share in [0.0, 0.5, 1.0] {
            let text = number::given(last_mu * share);
            let column = (f64::from(width - 1) * share).round() as i32;
            // The last number ends where the axis does.
            let at = (MARGIN + column).min(columns - text.len() as i32);
            sheet.write(at, height + 2, &text, Depth::Finger, look.dim());
        }
        sheet
    };
    Shown { told, paint: Box::new(paint) }
}
