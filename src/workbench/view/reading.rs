//! The reading of the selected grasp: every score with its meaning in one line.

use super::super::by_hand;
use super::super::state::{Job, Reading, State};
use super::{holding, number, table, wrapped};
use crate::mechanics::assess::Assessment;
use crate::mechanics::escape::{Escape, Sense};
use crate::mechanics::placement::Governor;
use crate::mechanics::{Verdict, Weakest};
use crate::part::Part;
use crate::search::{Key, Spot, Standing};
use ratatui::style::Style;
use ratatui::text::{Line, Span};

/// Width of the names on the left.
const NAMES: usize = 11;
/// Width of the values beside them.
const VALUES: usize = 13;

/// The lines of the reading for a width; `full` tells everything, one finger to a line.
pub(super) fn lines(state: &State, width: u16, full: bool) -> Vec<Line<'static>> {
    let Some(reading) = &state.reading else {
        return vec![Line::raw("No grasp is selected.")];
    };
    let mut page = Page { width: usize::from(width), full, state, lines: Vec::new() };
    if full {
        let edges = table::edges(&reading.grasp.spots);
        let rank = match state.row() {
            _ if by_hand::in_hand(state) => "in hand".to_owned(),
            Some(_) => format!("number {}", state.selected + 1),
            None => "not listed".to_owned(),
        };
        page.heading(&format!("grasp on edges {edges}, {rank}"), reading);
    } else if state.row().is_none() && !by_hand::in_hand(state) {
        page.tell("not listed", "", state.look.bad(), "the grasp last selected, under the present knobs");
    }
    page.doubts(reading);
    page.verdict(reading);
    page.loads_in_short(reading);
    page.friction(reading);
    let closed = reading.assessment.verdict == Verdict::Closed;
    if closed {
        page.quality(&reading.assessment);
        page.placement(&reading.assessment);
    }
    page.contacts(reading);
    page.proof();
    if closed {
        if let Some(weakest) = &reading.assessment.weakest {
            page.weakest(weakest);
        }
        page.per_finger(&reading.assessment);
    }
    if full {
        page.loads(reading);
        page.assumed(state);
    }
    page.lines
}

/// How the part gets out of an open grasp.
pub(super) fn escape_words(escape: &Escape, part: &Part) -> String {
    match escape {
        Escape::Slide { toward_deg } => {
            format!("nothing stops it sliding toward {} deg", number::degrees(*toward_deg))
        }
        Escape::Turn { about, sense } => {
            let at = part.file_point(*about);
            let sense = match sense {
                Sense::Clockwise => "clockwise",
                Sense::CounterClockwise => "counter-clockwise",
            };
            format!("nothing stops it turning {sense} about ({}, {})", number::at(at.x), number::at(at.y))
        }
    }
}

pub(super) struct Page<'a> {
    width: usize,
    pub(super) full: bool,
    pub(super) state: &'a State,
    lines: Vec<Line<'static>>,
}

impl Page<'_> {
    /// A name, a value and what it means; on the full page what does not fit goes to further lines.
    pub(super) fn tell(&mut self, name: &str, value: &str, style: Style, meaning: &str) {
        let look = self.state.look;
        // Values line up where there is room for it.
        let value = if value.is_empty() || self.width < 60 { value.to_owned() } else { format!("{value:<VALUES$}") };
        let gap = if value.is_empty() { "" } else { "  " };
        let room = self.width.saturating_sub(NAMES + value.chars().count() + gap.len());
        let mut rest = Vec::new();
        let first = if self.full && meaning.chars().count() > room {
            let mut parts = wrapped(meaning, self.width.saturating_sub(NAMES)).into_iter();
            // The value keeps its line when the first part would not fit beside it.
            let mut head = String::new();
            let first = parts.next().unwrap_or_default();
            if first.chars().count() <= room {
                head = first;
            } else {
                rest.push(first);
            }
            rest.extend(parts);
            head
        } else {
            meaning.to_owned()
        };
        self.lines.push(Line::from(vec![
            Span::styled(format!("{name:<NAMES$}"), look.dim()),
            Span::styled(value, style),
            Span::raw(format!("{gap}{first}")),
        ]));
        for line in rest {
            self.lines.push(Line::raw(format!("{:NAMES$}{line}", "")));
        }
    }

    fn heading(&mut self, text: &str, reading: &Reading) {
        let state = self.state;
        self.lines.push(Line::styled(text.to_owned(), state.look.title()));
        if let Some(mark) = state.mark_on(&reading.grasp.spots) {
            let saved = if mark.saved { "saved" } else { "not saved" };
            let name = crate::file::shown(&mark.keep.name);
            let note = crate::file::shown(&mark.keep.note);
            self.tell("marked", &name, state.look.plain(), &format!("({saved})"));
            if !note.is_empty() {
                self.tell("why", "", state.look.plain(), &note);
            }
        }
    }

    fn doubts(&mut self, reading: &Reading) {
        let bad = self.state.look.bad();
        for (finger, room) in reading.grasp.rooms_mm.iter().enumerate() {
            if *room < 0.0 {
                self.tell("fit", &format!("finger {} stands where none fits", finger + 1), bad, "");
            }
        }
        for (a, b) in &reading.grasp.too_near {
            self.tell("fit", &format!("fingers {} and {} are too near", a + 1, b + 1), bad, "");
        }
        if let Some(Err(fault)) = &reading.grasp.jaws {
            self.tell("fit", "no jaws so:", bad, &fault.to_string());
        }
        for doubt in &reading.doubts {
            self.tell("in doubt", "two ways disagree:", bad, &doubt.to_string());
        }
    }

    fn verdict(&mut self, reading: &Reading) {
        let look = self.state.look;
        let a = &reading.assessment;
        let (style, meaning) = match a.verdict {
            Verdict::Closed => (look.good(), "every push and turn can be balanced by pressing enough".to_owned()),
            Verdict::Marginal => (look.bad(), "on the very edge of closing: not to be relied on".to_owned()),
            Verdict::Open => (
                look.bad(),
                match &a.escape {
                    Some(escape) => escape_words(escape, self.state.order.scene.part()),
                    None => "some push cannot be balanced, however hard the fingers press".to_owned(),
                },
            ),
        };
        self.tell("verdict", a.verdict.word(), style, &meaning);
    }

    fn friction(&mut self, reading: &Reading) {
        let look = self.state.look;
        let a = &reading.assessment;
        let mu = number::mu(self.state.setup().friction.mu);
        match a.friction_needed {
            None if a.friction_margin.is_some_and(|margin| margin > 0.0) => {
                let margin = number::margin(a.friction_margin);
                self.tell("friction", &format!("margin {margin}"), look.title(), "by the edges' own friction; mu is 0");
            }
            None => match a.friction_needed_closure {
                Some(closure) => {
                    let meaning = format!("holds the loads within the limit; {} it", holding::closes_at(closure));
                    self.tell("friction", "no mu", look.bad(), &meaning);
                }
                None => self.tell("friction", "no mu", look.bad(), "closes this grasp"),
            },
            Some(needed) => {
                let none = needed < 5e-5;
                let value = match (a.verdict, none) {
                    (Verdict::Closed, true) if self.state.setup().friction.mu <= 0.0 => "none needed".to_owned(),
                    // The least friction is a limit that is not reached: at exactly 0 such a grasp is open.
                    (_, true) => "0+ needed".to_owned(),
                    _ => format!("{} needed", number::mu(needed)),
                };
                let meaning = match (a.verdict, a.friction_margin_deg) {
                    _ if for_loads(a) => {
                        let closure = a.friction_needed_closure.map_or(String::new(), holding::closes_at);
                        let margin = number::margin(a.friction_margin);
                        format!("margin {margin} of mu {mu}, for the loads; {closure}")
                    }
                    (Verdict::Closed, Some(degrees)) => format!(
                        "of mu {mu}: margin {}, normals may be off {degrees:.1} deg",
                        number::margin(a.friction_margin)
                    ),
                    _ if none => format!("any mu above 0 closes it; mu is {mu}"),
                    _ => format!("mu is {mu}"),
                };
                self.tell("friction", &value, look.title(), &meaning);
            }
        }
        if !reading.band.is_empty() {
            let mut meaning = String::new();
            let mut last = None;
            for (name, standing) in &reading.band {
                let word = standing_word(standing);
                if last == Some(word) {
                    meaning.push_str(", ");
                } else {
                    let gap = if last.is_some() { "; " } else { "" };
                    meaning.push_str(&format!("{gap}{word} at "));
                }
                meaning.push_str(&format!("{name} {}", number::mu(standing.mu)));
                last = Some(word);
            }
            let friction = &self.state.setup().friction;
            if let Some(condition) = friction.condition {
                meaning.push_str(&format!(" ({})", condition.word()));
            }
            self.tell("band", "", look.plain(), &meaning);
            if let (true, Some(source)) = (self.full, &friction.source) {
                self.tell("", "", look.plain(), &format!("source: {}", crate::file::shown(source)));
            }
        }
    }

    fn quality(&mut self, a: &Assessment) {
        let look = self.state.look;
        let meaning = format!("any 1 N of load is held with {} N of total squeeze", number::mm(1.0 / a.quality));
        self.tell("quality", &number::quality(a.quality), look.title(), &meaning);
        if self.full {
            let scale = number::mm(self.state.order.scene.frame().scale_mm);
            self.tell("", "", look.plain(), &format!("a torque counts as the force that makes it at {scale} mm"));
        }
    }

    fn per_finger(&mut self, a: &Assessment) {
        let meaning = format!("any 1 N of load is held with {} N per finger", number::mm(1.0 / a.quality_per_finger));
        self.tell("per finger", &number::quality(a.quality_per_finger), self.state.look.plain(), &meaning);
    }

    fn placement(&mut self, a: &Assessment) {
        let placement = &a.placement;
        let governs = match placement.governor {
            Governor::Closure => "each finger may be off this far before closure is lost".to_owned(),
            Governor::Stretch { finger } => format!(
                "then finger {} leaves its stretch; closure to {} mm",
                finger + 1,
                number::mm(placement.torque_mm)
            ),
        };
        self.tell("placement", &format!("{} mm", number::mm(placement.mm)), self.state.look.title(), &governs);
    }

    /// What the proof says of the selected row and of the whole outline, on the key the list is sorted by.
    fn proof(&mut self) {
        if by_hand::in_hand(self.state) {
            return;
        }
        let Some(shown) = self.state.shown.as_ref().filter(|_| !self.state.is_old()) else { return };
        let bound = self.state.row().and_then(|row| row.bound);
        let (Some(family), Some(all)) = (bound, shown.ranking.proof.and_then(|proof| proof.best_bound)) else { return };
        let word = shown.order.key.word().replace('_', " ");
        let told = |value: f64| match shown.order.key {
            Key::Quality | Key::QualityPerFinger => number::quality(value),
            Key::Placement => format!("{} mm", number::mm(value)),
            Key::Friction => number::mu(value),
            Key::Squeeze => format!("{} N", number::mm(value)),
            Key::LoadMargin => number::times(Some(value)),
        };
        let limit = if shown.order.key.more_is_better() { "at most" } else { "at least" };
        let meaning = format!("{word} on these edges; {limit} {} anywhere", told(all));
        let proof = shown.ranking.proof.as_ref();
        let name = if proof.is_some_and(|proof| proof.proved) { "proved" } else { "not proved" };
        self.tell(name, &format!("{limit} {}", told(family)), self.state.look.title(), &meaning);
    }

    fn weakest(&mut self, weakest: &Weakest) {
        let mut told = Vec::new();
        if let Some(degrees) = weakest.force_deg() {
            told.push(format!("toward {} deg ({:.2})", number::degrees(degrees), weakest.force()));
        }
        // A share that would be shown as nothing is left out.
        if weakest.torque().abs() >= 0.005 {
            // In short, so that the shares of both fit 80 columns.
            let turn = if weakest.torque() > 0.0 { "ccw" } else { "cw" };
            told.push(format!("turning {turn} ({:.2})", weakest.torque().abs()));
        }
        let meaning = format!("fingers give least {}", told.join(", "));
        self.tell("weakest", "", self.state.look.plain(), &meaning);
        if self.full && told.len() > 1 {
            self.tell("", "", self.state.look.plain(), "in brackets the shares of force and of torque over the reach");
        }
    }

    fn contacts(&mut self, reading: &Reading) {
        let part = self.state.order.scene.part();
        let told: Vec<String> = reading
            .grasp
            .spots
            .iter()
            .zip(&reading.grasp.contacts)
            .enumerate()
            .map(|(finger, (spot, contact))| {
                let p = part.file_point(contact.point);
                format!("{} {} ({}, {})", finger + 1, spot_word(spot), number::at(p.x), number::at(p.y))
            })
            .collect();
        if self.full {
            for (finger, text) in told.iter().enumerate() {
                let contact = &reading.grasp.contacts[finger];
                let room = reading.grasp.rooms_mm.get(finger).copied().unwrap_or(0.0);
                let meaning = format!(
                    "normal {} deg  mu {}  {} mm to the end of its stretch",
                    number::degrees(contact.normal.y.atan2(contact.normal.x).to_degrees()),
                    number::mu(contact.mu),
                    number::mm(room.max(0.0)),
                );
                self.tell(if finger == 0 { "fingers" } else { "" }, text, self.state.look.plain(), &meaning);
            }
            self.jaws(reading);
            return;
        }
        // As many side by side as fit.
        let widest = told.iter().map(|text| text.chars().count()).max().unwrap_or(0) + 3;
        let beside = (self.width.saturating_sub(NAMES) / widest.max(1)).max(1);
        for (i, group) in told.chunks(beside).enumerate() {
            let text: String = group.iter().map(|text| format!("{text:<widest$}")).collect();
            self.tell(if i == 0 { "fingers" } else { "" }, "", self.state.look.plain(), text.trim_end());
        }
    }

    /// Where parallel jaws stand.
    fn jaws(&mut self, reading: &Reading) {
        let Some(Ok(jaws)) = &reading.grasp.jaws else { return };
        let centre = self.state.order.scene.part().file_point(jaws.centre);
        let how = if jaws.inside { "pressing outward" } else { "pressing inward" };
        let meaning = format!(
            "{how}, axis toward {} deg, centre ({}, {})",
            number::degrees(jaws.angle_rad.to_degrees()),
            number::at(centre.x),
            number::at(centre.y)
        );
        self.tell("jaws", &format!("{} mm open", number::mm(jaws.opening_mm)), self.state.look.plain(), &meaning);
    }

    fn assumed(&mut self, state: &State) {
        self.lines.push(Line::raw(""));
        let mut assumed =
            String::from("rigid bodies, first-order statics, dry friction; positions in mm as in the part file");
        if matches!(state.job, Job::Running(_)) || state.is_old() {
            assumed.push_str("; read under the present knobs, the list is being ranked");
        }
        self.tell("assumed", "", state.look.plain(), &assumed);
        if let (Some(row), Some(mass)) = (state.density, state.order.scene.part().mass()) {
            let how = format!("by {} kg/m3 of {}, chosen here ({})", row.kg_m3, row.name, row.source);
            self.tell("mass", &number::kg(mass.kg), state.look.plain(), &how);
        }
    }
}

/// The friction needed is that for the loads, not that for closure.
fn for_loads(a: &Assessment) -> bool {
    match (a.friction_needed_closure, a.friction_needed_holding) {
        (Some(closure), Some(holding)) => holding > closure,
        _ => false,
    }
}

/// How a grasp stands at some friction, in a word or two: whether it holds the loads where there are any, whether it
/// closes where there are none.
fn standing_word(standing: &Standing) -> &'static str {
    match (&standing.holding, standing.verdict) {
        (Some(holding), Verdict::Closed) if holding.held() => "held",
        (Some(_), Verdict::Closed) => "not held",
        (_, verdict) => verdict.word(),
    }
}

fn spot_word(spot: &Spot) -> String {
    format!("{}:{} @ {}", spot.edge.ring, spot.edge.edge, number::at(spot.along_mm))
}
