//! One grasp as commands read it, and its numbers in words.

use crate::file::shown;
use crate::hand::{Closing, Drive, Hand, Tip};
use crate::mechanics::assess::{Doubt, Placement};
use crate::mechanics::escape::{Escape, Sense};
use crate::mechanics::placement::Governor;
use crate::mechanics::{Assessment, FrictionBand, Verdict};
use crate::search::{Grasp, Scene, Spot};

/// A grasp, its scores, and what speaks against the scores.
pub(super) struct Reading {
    /// Where the fingers stand.
    pub(super) grasp: Grasp,
    /// Every score.
    pub(super) assessment: Assessment,
    /// Disagreements of the two ways to the scores; any makes the reading inconclusive.
    pub(super) doubts: Vec<Doubt>,
}

impl Reading {
    /// Reads a grasp.
    pub(super) fn of(scene: &Scene, grasp: Grasp) -> Self {
        let (assessment, doubts) = scene.assess(&grasp);
        Self { grasp, assessment, doubts }
    }

    /// The verdict's word; a reading in doubt has none.
    pub(super) fn verdict(&self) -> &'static str {
        if self.doubts.is_empty() { self.assessment.verdict.word() } else { "inconclusive" }
    }

    /// True when the grasp is closed beyond doubt.
    pub(super) fn is_closed(&self) -> bool {
        self.doubts.is_empty() && self.assessment.verdict == Verdict::Closed
    }
}

/// Decimals of a position on a part of a size: four figures or more, and at least one decimal.
pub(super) fn decimals(reach_mm: f64) -> usize {
    // Reach is finite and above 0; the cast saturates.
    (2.0 - reach_mm.log10().floor()).clamp(1.0, 9.0) as usize
}

/// The fingers as `ring:edge@along`, mm.
pub(super) fn fingers(spots: &[Spot], decimals: usize) -> String {
    let one = |spot: &Spot| format!("{}:{}@{:.decimals$}", spot.edge.ring, spot.edge.edge, spot.along_mm + 0.0);
    spots.iter().map(one).collect::<Vec<_>>().join(" ")
}

/// A score in few characters: five decimals, or two figures where they would hide it.
pub(super) fn short(value: f64) -> String {
    if value != 0.0 && value.abs() < 1e-3 { format!("{value:.1e}") } else { format!("{value:.5}") }
}

/// A ratio or coefficient in few characters.
pub(super) fn ratio(value: f64) -> String {
    if value >= 100.0 { format!("{value:.0}") } else { format!("{value:.3}") }
}

/// A length in few characters, mm.
pub(super) fn length(value: f64) -> String {
    if value != 0.0 && value.abs() < 1e-2 { format!("{value:.1e}") } else { format!("{value:.3}") }
}

/// A force in few characters, N.
pub(super) fn newtons(value: f64) -> String {
    // Rounded first, so that a small negative number is not shown as minus nought.
    if value.abs() >= 1e5 { format!("{value:.2e}") } else { format!("{:.2}", (value * 100.0).round() / 100.0 + 0.0) }
}

/// The hand: how many tips of what size.
pub(super) fn hand(hand: &Hand) -> String {
    let tips = match hand.tip {
        Tip::Pin => format!("{} pins of radius {} mm", hand.fingers.get(), hand.pin_radius_mm),
        Tip::Pad => format!("{} pads {} x {} mm", hand.fingers.get(), hand.pad_width_mm, hand.pad_depth_mm),
    };
    match hand.closing {
        Closing::Free => tips,
        Closing::Parallel => format!("{tips}, parallel"),
    }
}

/// What is assumed of how the fingers share the squeeze; stands wherever a squeeze is printed.
pub(super) fn drive(drive: Drive) -> &'static str {
    match drive {
        Drive::Adjustable => "fingers are assumed able to set their force",
        Drive::Equal => "all fingers press alike",
    }
}

/// The other frictions of the band that are stated, each with its name.
pub(super) fn band(friction: &FrictionBand) -> impl Iterator<Item = (&'static str, f64)> + use<> {
    let band =
        [("low", friction.low), ("nominal", friction.nominal), ("high", friction.high), ("sliding", friction.sliding)];
    band.into_iter().filter_map(|(name, mu)| Some((name, mu?)))
}

/// A text with control characters removed and cut to so many characters, a dot in the place of what is lost.
pub(super) fn cut(text: &str, width: usize) -> String {
    let text = shown(text);
    if text.chars().count() <= width {
        return text;
    }
    text.chars().take(width.saturating_sub(1)).chain(std::iter::once('.')).collect()
}

/// Characters in a line of text.
pub(super) const LINE: usize = 80;

/// A text broken into lines of at most [`LINE`] characters, the first set in by so many blanks and the others by so many.
pub(super) fn wrapped(text: &str, first: usize, others: usize) -> String {
    let mut lines = " ".repeat(first);
    let mut width = first;
    for (number, word) in text.split_whitespace().enumerate() {
        let length = word.chars().count();
        if number > 0 && width + 1 + length > LINE {
            lines.push('\n');
            lines.push_str(&" ".repeat(others));
            width = others;
        } else if number > 0 {
            lines.push(' ');
            width += 1;
        }
        lines.push_str(word);
        width += length;
    }
    lines
}

/// How the part gets out.
pub(super) fn escape(scene: &Scene, escape: &Escape) -> String {
    match escape {
        Escape::Slide { toward_deg } => format!("slides toward {:.1} deg", toward_deg + 0.0),
        Escape::Turn { about, sense } => {
            let at = scene.part().file_point(*about);
            format!("turns {} about ({:.1}, {:.1}) mm", sense_word(*sense), at.x, at.y)
        }
    }
}

/// The short word of a sense of turning.
pub(super) fn sense_word(sense: Sense) -> &'static str {
    match sense {
        Sense::Clockwise => "cw",
        Sense::CounterClockwise => "ccw",
    }
}

/// What limits the placement.
pub(super) fn governor(placement: &Placement) -> String {
    match placement.governor {
        Governor::Closure => "closure".to_owned(),
        Governor::Stretch { finger } => format!("the end of finger {}'s stretch", finger + 1),
    }
}

/// Why fingers may not stand where they do; nothing when they may.
pub(super) fn misfits(grasp: &Grasp) -> Vec<String> {
    let rooms = grasp.rooms_mm.iter().enumerate().filter(|(_, room)| **room < 0.0);
    let mut reasons: Vec<_> = rooms
        .map(|(finger, _)| {
            format!("finger {} does not fit there: a corner, a keep-out or another edge is in its way", finger + 1)
        })
        .collect();
    reasons.extend(grasp.jaws.iter().filter_map(|jaws| Some(format!("no jaws so: {}", jaws.as_ref().err()?))));
    reasons.extend(
        grasp.too_near.iter().map(|(a, b)| format!("fingers {} and {} are nearer than the gap allows", a + 1, b + 1)),
    );
    reasons
}
