//! What the loads ask of the selected grasp, in the reading: in short, and with every case.

use super::super::action::{Action, key_of};
use super::super::state::Reading;
use super::bars::cut;
use super::reading::Page;
use super::{loads, number};
use crate::file::shown;
use crate::hand::{Bearing, Drive};
use crate::mechanics::jaw_formula::{self, Lies};
use crate::mechanics::{CaseHolding, Holding, Limit, LimitedBy, Verdict};
use crate::search::{Grasp, Standing};

/// Longest name of a case where there is little room.
const NAME: usize = 18;

/// Whether a case is held, in a word or two.
pub(super) fn held_word(case: &CaseHolding) -> &'static str {
    match (case.held, case.unsure) {
        (true, _) => "held",
        (false, true) => "in doubt",
        (false, false) => "not held",
    }
}

/// What was assumed of the way fingers share the squeeze.
pub(super) fn drive_words(drive: Drive) -> &'static str {
    match drive {
        Drive::Adjustable => "each finger is taken to set its own force, up to the squeeze (drive adjustable)",
        Drive::Equal => "all fingers are taken to press alike (drive equal)",
    }
}

/// The limit and where it comes from.
pub(super) fn limit_words(limit: &Limit, grasp: &Grasp) -> String {
    let limit_n = number::given(limit.squeeze_n);
    match limit.by {
        LimitedBy::Hand => format!("{limit_n} N each is all the hand gives"),
        LimitedBy::Edge { finger } => {
            let edge = grasp.spots.get(finger).map(|spot| format!(" {}:{}", spot.edge.ring, spot.edge.edge));
            format!("more than {limit_n} N each would mark edge{}", edge.unwrap_or_default())
        }
    }
}

/// Squeeze of a case per finger and in all, with its worst direction.
pub(super) fn asks(case: &CaseHolding, fingers: usize) -> String {
    let worst = case
        .direction_deg
        .map_or(String::new(), |deg| format!(", worst when accelerated toward {} deg", number::degrees(deg)));
    let margin = case.margin.map_or(String::new(), |margin| format!(", load margin {}", number::times(Some(margin))));
    let loose = case
        .lets_go_above_n
        .map_or(String::new(), |n| format!(", pressed alike above {} N each it gets loose", number::mm(n)));
    match case.squeeze_n {
        _ if case.unsure => "the solvers could not prove a squeeze".to_owned(),
        Some(n) => format!(
            "{} N per finger, {} N in all{margin}: {}{loose}{worst}",
            number::mm(n),
            number::mm(n * fingers as f64),
            held_word(case)
        ),
        None => format!("no squeeze holds it, however large{worst}"),
    }
}

impl Page<'_> {
    /// Two lines: the squeeze needed and whether the loads are held.
    pub(super) fn loads_in_short(&mut self, reading: &Reading) {
        let look = self.state.look;
        let Some(holding) = &reading.assessment.holding else { return };
        let case = holding.governing_case();
        let name = cut(&shown(&case.name), NAME);
        match case.squeeze_n {
            Some(n) => {
                let all = number::mm(n * reading.grasp.contacts.len() as f64);
                let toward =
                    case.direction_deg.map_or(String::new(), |deg| format!(", toward {} deg", number::degrees(deg)));
                let meaning = format!("{all} N in all; \"{name}\" asks most{toward}");
                self.tell("squeeze", &format!("{} N each", number::mm(n)), look.title(), &meaning);
            }
            None if case.unsure => {
                self.tell("squeeze", "in doubt", look.bad(), &format!("no squeeze could be proved for \"{name}\""));
            }
            None => {
                let meaning = match holding.drive {
                    Drive::Adjustable => format!("\"{name}\" is not held by any squeeze"),
                    Drive::Equal => {
                        let other = key_of(Action::OtherDrive);
                        format!("pressing alike never holds \"{name}\"; {other} sets each force")
                    }
                };
                self.tell("squeeze", "none will do", look.bad(), &meaning);
            }
        }
        // Where no squeeze will do there is no margin to speak of.
        let margin = holding.load_margin().filter(|margin| *margin > 0.0);
        let times = margin.map(|margin| number::times(Some(margin)));
        let limit = match &holding.limit {
            Some(limit) => limit_words(limit, &reading.grasp),
            None => format!("no force limit is set: {} types one", key_of(Action::LimitEnter)),
        };
        if holding.held() {
            let value = times.map_or("held".to_owned(), |times| format!("held {times}"));
            self.tell("loads", &value, look.good(), &limit);
        } else {
            let failing = holding.cases.iter().filter(|case| !case.held).count();
            let times = times.map_or(String::new(), |times| format!(", {times}"));
            let lets_go = holding.cases.iter().find_map(|case| Some((case, case.lets_go_above_n?)));
            let meaning = match lets_go {
                Some((case, n)) => {
                    format!("pressed alike above {} N each, \"{}\" gets loose", number::mm(n), shown(&case.name))
                }
                None => format!("{failing} of {}{times}; {limit}", holding.cases.len()),
            };
            self.tell("loads", "NOT HELD", look.bad(), &meaning);
        }
    }

    /// Every case, the forces of the one that asks most, the hand formula, what presses on the edges, other friction.
    pub(super) fn loads(&mut self, reading: &Reading) {
        let plain = self.state.look.plain();
        self.tell("", "", plain, "");
        let Some(holding) = &reading.assessment.holding else {
            let how =
                format!("{} adds load cases; squeeze and load margin follow from them", key_of(Action::OpenLoads));
            self.tell("loads", "none", plain, &how);
            return;
        };
        self.tell("drive", "", plain, drive_words(holding.drive));
        let fingers = reading.grasp.contacts.len();
        for (number, case) in holding.cases.iter().enumerate() {
            let words = self.state.setup().loads.get(number).map_or(String::new(), loads::in_short);
            let name = if number == holding.governing { "asks most" } else { "load" };
            let style = if case.held { plain } else { self.state.look.bad() };
            let meaning = format!("{words}: {}", asks(case, fingers));
            self.tell(name, &format!("\"{}\"", shown(&case.name)), style, &meaning);
        }
        self.forces(holding);
        self.formula(reading, holding);
        self.bearing(reading, holding);
        self.standings(reading);
        self.friction_of_both(reading, holding);
    }

    fn forces(&mut self, holding: &Holding) {
        let plain = self.state.look.plain();
        let case = holding.governing_case();
        if case.forces.is_empty() {
            return;
        }
        let left = self.state.setup().loads.get(holding.governing).map_or(1.0, |load| load.squeeze_left);
        let with = if left < 1.0 { ", with the part of the squeeze that is left" } else { "" };
        let of = format!(
            "N, of \"{}\"{with}; along: as the edge runs with the material on its left; often one set of many",
            shown(&case.name)
        );
        self.tell("forces", "", plain, &of);
        for (finger, force) in case.forces.iter().enumerate() {
            let [normal, along, up] = [force.normal_n, force.along_n, force.up_n].map(number::at);
            let text = format!("finger {}: {normal} into the part, {along} along its edge, {up} up", finger + 1);
            self.tell("", "", plain, &text);
        }
    }

    fn formula(&mut self, reading: &Reading, holding: &Holding) {
        let plain = self.state.look.plain();
        let scene = &self.state.order.scene;
        let wrenches = scene.wrenches(&reading.grasp);
        let hold = scene.hold(&wrenches);
        let (cases, governing) = (scene.cases(), holding.governing);
        let Some(load) = holding.worst_load(cases, governing) else { return };
        let left = cases.get(governing).map_or(1.0, |case| case.squeeze_left);
        match jaw_formula::squeeze_n(&hold, &load.wrench, scene.frame().scale_mm) {
            Ok(n) => {
                let value = format!("{} N each", number::mm(n / left));
                self.tell("formula", &value, plain, "hand formula S W / (2 mu) for two jaws, beside the squeeze above");
            }
            Err(why) => self.tell("formula", "", plain, &format!("hand formula S W / (2 mu) does not apply: {why}")),
        }
        match jaw_formula::lies(&hold, &load.wrench) {
            Some(Lies::AlongFaces) => {
                self.tell("", "", plain, "the load lies along the faces: an equal squeeze of both fingers holds it");
            }
            Some(Lies::AlongAxis) => {
                let text = "part of the load lies along the squeeze axis: one finger must back up or give";
                self.tell("", "", plain, text);
            }
            None => {}
        }
    }

    /// Pressure under pads and line load under pins at the squeeze needed; fingers alike share a line.
    fn bearing(&mut self, reading: &Reading, holding: &Holding) {
        let Some(squeeze_n) = holding.squeeze_n() else { return };
        let scene = &self.state.order.scene;
        let mut told: Vec<(String, String)> = Vec::new();
        for (finger, contact) in reading.grasp.contacts.iter().enumerate() {
            let bearing = scene.bearing(contact);
            let value = format!("{} {}", number::mm(bearing.load(squeeze_n)), bearing.unit());
            let over = match bearing {
                Bearing::Face { mm2 } => format!("over a pad face of {} mm2", number::mm(mm2)),
                Bearing::Line { mm } => format!("along a line of {} mm", number::mm(mm)),
            };
            let edge = reading.grasp.spots.get(finger).and_then(|spot| scene.part().limit_on(spot.edge));
            let limit = edge.and_then(|limit| bearing.most_n(limit)).map_or(String::new(), |most_n| {
                format!(
                    "; finger {} marks its edge from {} {}",
                    finger + 1,
                    number::mm(bearing.load(most_n)),
                    bearing.unit()
                )
            });
            let text = (value, format!("{over} at that squeeze{limit}"));
            if !told.contains(&text) {
                told.push(text);
            }
        }
        for (i, (value, meaning)) in told.iter().enumerate() {
            self.tell(if i == 0 { "pressing" } else { "" }, value, self.state.look.plain(), meaning);
        }
    }

    /// The loads at each friction of the band.
    fn standings(&mut self, reading: &Reading) {
        for (i, (name, standing)) in reading.band.iter().enumerate() {
            let Some(holding) = &standing.holding else { continue };
            let case = holding.governing_case();
            let squeeze =
                case.squeeze_n.map_or("no squeeze holds".to_owned(), |n| format!("{} N each for", number::mm(n)));
            let once = if *name == "sliding" { "once slip has begun: " } else { "" };
            let meaning = format!("{once}{}; {squeeze} \"{}\"", held_at(standing, holding), shown(&case.name));
            let style = if standing.holds() { self.state.look.plain() } else { self.state.look.bad() };
            let value = format!("{name} {}", number::mu(standing.mu));
            self.tell(if i == 0 { "at mu" } else { "" }, &value, style, &meaning);
        }
    }

    /// What closure and what holding needs of friction, where both are known.
    fn friction_of_both(&mut self, reading: &Reading, holding: &Holding) {
        let a = &reading.assessment;
        let (Some(limit), Some(closure)) = (&holding.limit, a.friction_needed_closure) else { return };
        let loads =
            a.friction_needed_holding.map_or("no mu holds".to_owned(), |n| format!("mu {} holds", number::mu(n)));
        let text = format!(
            "{}; {loads} the loads within {} N per finger; the larger counts",
            closes_at(closure),
            number::given(limit.squeeze_n)
        );
        self.tell("friction", "", self.state.look.plain(), &text);
    }
}

/// The friction at which a grasp closes, in words.
pub(super) fn closes_at(mu: f64) -> String {
    if mu < 5e-5 { "any mu closes".to_owned() } else { format!("mu {} closes", number::mu(mu)) }
}

/// Closed or not and held or not, at a friction of the band.
fn held_at(standing: &Standing, holding: &Holding) -> String {
    let held = match (holding.held(), holding.load_margin()) {
        (true, Some(margin)) => format!("held {}", number::times(Some(margin))),
        (true, None) => "held".to_owned(),
        (false, _) => "not held".to_owned(),
    };
    match standing.verdict {
        Verdict::Closed => held,
        verdict => format!("{}, {held}", verdict.word()),
    }
}
