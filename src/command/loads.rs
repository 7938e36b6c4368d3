//! What the load cases ask of a grasp, in words: squeeze, limit, finger forces, and what a hand calculation says.

use super::reading::{Reading, band, cut, decimals, drive, fingers, length, newtons, ratio, wrapped};
use crate::file::shown;
use crate::hand::Bearing;
use crate::mechanics::jaw_formula::{self, Lies};
use crate::mechanics::{Assessment, CaseHolding, Holding, Limit, LimitedBy};
use crate::search::{Grasp, Scene};
use std::fmt::{Result as Written, Write};

/// The squeeze of all fingers together, every one of them at it, N.
pub(super) fn in_all(squeeze_n: f64, grasp: &Grasp) -> f64 {
    squeeze_n * grasp.contacts.len() as f64
}

/// What a hand calculation says beside the squeeze of a case.
pub(super) struct Beside {
    /// The hand formula's squeeze, N per finger, or why it does not apply.
    pub(super) formula: Result<f64, String>,
    /// How the load lies to two opposed fingers.
    pub(super) lies: Option<Lies>,
}

impl Beside {
    /// Of a case in its worst direction.
    pub(super) fn of(scene: &Scene, grasp: &Grasp, holding: &Holding, case: usize) -> Self {
        let wrenches = scene.wrenches(grasp);
        let hold = scene.hold(&wrenches);
        let Some((load, own)) = holding.worst_load(scene.cases(), case).zip(scene.cases().get(case)) else {
            return Self { formula: Err("there is no load".to_owned()), lies: None };
        };
        // As with the squeeze: what must be set before a part of it is lost.
        let formula = jaw_formula::squeeze_n(&hold, &load.wrench, scene.frame().scale_mm);
        Self {
            formula: formula.map(|squeeze_n| squeeze_n / own.squeeze_left).map_err(|why| why.to_string()),
            lies: jaw_formula::lies(&hold, &load.wrench),
        }
    }
}

/// Why a squeeze may not be larger.
pub(super) fn limited_by(limit: &Limit, grasp: &Grasp) -> String {
    match limit.by {
        LimitedBy::Hand => "the hand gives no more".to_owned(),
        LimitedBy::Edge { finger } => {
            let edge = grasp.spots[finger].edge;
            format!("more would mark the part: edge {}:{} under finger {}", edge.ring, edge.edge, finger + 1)
        }
    }
}

/// Whether a case is held, in a word or two.
pub(super) fn held_word(case: &CaseHolding) -> &'static str {
    match (case.held, case.unsure) {
        (true, _) => "held",
        (false, true) => "in doubt",
        (false, false) => "NOT HELD",
    }
}

/// Longest name of a case in the table of cases.
const NAME: usize = 16;

/// Every case and what follows from it, then the band of friction. Lines are set in by four blanks.
pub(super) fn describe(text: &mut String, scene: &Scene, reading: &Reading) -> Written {
    if let Some(holding) = &reading.assessment.holding {
        cases(text, &reading.grasp, holding)?;
        limit(text, &reading.grasp, &reading.assessment, holding)?;
        forces(text, scene, &reading.grasp, holding)?;
        beside(text, scene, &reading.grasp, holding)?;
        bearing(text, scene, &reading.grasp, holding)?;
        least_acceleration(text, scene, &reading.grasp)?;
    }
    standing(text, scene, &reading.grasp)
}

/// Directions the acceleration envelope is told in.
const DIRECTIONS: usize = 36;

/// The acceleration envelope of a grasp: degrees from +x and m/s2.
pub(super) fn envelope(scene: &Scene, grasp: &Grasp) -> Option<Vec<(f64, f64)>> {
    if scene.cases().is_empty() { None } else { scene.envelope(grasp, DIRECTIONS) }
}

fn least_acceleration(text: &mut String, scene: &Scene, grasp: &Grasp) -> Written {
    let Some(least) =
        envelope(scene, grasp).and_then(|ends| ends.into_iter().reduce(|a, b| if b.1 < a.1 { b } else { a }))
    else {
        return Ok(());
    };
    let first = scene.setup().loads.first().map_or(1.0, |load| load.safety);
    let (deg, m_s2) = least;
    if m_s2.is_infinite() {
        return say(text, "any acceleration in the plane is held at the limit");
    }
    say(
        text,
        &format!(
            "on top of its weight (S {}) the limit holds {} m/s2 in any of {DIRECTIONS} directions of the plane, least toward \
             {deg:.0} deg",
            ratio(first),
            ratio(m_s2)
        ),
    )
}

fn say(text: &mut String, words: &str) -> Written {
    writeln!(text, "{}", wrapped(words, 4, 6))
}

fn cases(text: &mut String, grasp: &Grasp, holding: &Holding) -> Written {
    let count = grasp.contacts.len();
    say(text, &format!("squeeze in N per finger and with all {count} together; {}:", drive(holding.drive)))?;
    writeln!(text, "      {:NAME$} {:>8} {:>8} {:>6}", "load", "N each", "in all", "margin")?;
    for (number, case) in holding.cases.iter().enumerate() {
        let value = |n: Option<f64>| n.map_or("none".to_owned(), newtons);
        write!(
            text,
            "    {} {:NAME$} {:>8} {:>8} {:>6}  {}",
            if number == holding.governing { '*' } else { ' ' },
            cut(&case.name, NAME),
            value(case.squeeze_n),
            value(case.squeeze_n.map(|n| in_all(n, grasp))),
            case.margin.map_or("-".to_owned(), ratio),
            held_word(case)
        )?;
        match case.direction_deg {
            Some(deg) => writeln!(text, ", toward {:.1} deg", deg + 0.0)?,
            None => writeln!(text)?,
        }
        if let Some(n) = case.lets_go_above_n {
            writeln!(text, "        pressed alike with more than {} N each, the fingers let go", newtons(n))?;
        }
    }
    let mut legend = vec!["* asks most"];
    if holding.cases.iter().any(|case| case.direction_deg.is_some()) {
        legend.push("toward: the acceleration's worst direction");
    }
    if holding.cases.iter().any(|case| case.squeeze_n.is_none()) {
        legend.push("none: no squeeze holds it, however large");
    }
    say(text, &legend.join("; "))
}

fn limit(text: &mut String, grasp: &Grasp, a: &Assessment, holding: &Holding) -> Written {
    let Some(limit) = &holding.limit else {
        return say(text, "no force limit is set: what some squeeze holds is called held");
    };
    say(text, &format!("limit {} N per finger: {}", newtons(limit.squeeze_n), limited_by(limit, grasp)))?;
    let value = |needed: Option<f64>| needed.map_or("none".to_owned(), ratio);
    say(
        text,
        &format!(
            "friction needed: mu {} to close, {} to hold the loads within the limit",
            value(a.friction_needed_closure),
            value(a.friction_needed_holding)
        ),
    )
}

fn forces(text: &mut String, scene: &Scene, grasp: &Grasp, holding: &Holding) -> Written {
    let case = holding.governing_case();
    if case.forces.is_empty() {
        return Ok(());
    }
    let left = scene.cases().get(holding.governing).map_or(1.0, |case| case.squeeze_left);
    let with = if left < 1.0 { ", with the part of the squeeze that is left" } else { "" };
    say(text, &format!("forces in N that hold \"{}\"{with}; often one set of many:", shown(&case.name)))?;
    let places: Vec<_> =
        grasp.spots.iter().map(|spot| fingers(std::slice::from_ref(spot), decimals(scene.part().reach_mm()))).collect();
    let width = places.iter().map(String::len).max().unwrap_or(0);
    writeln!(text, "      {:width$} {:>9} {:>9} {:>9}", "", "normal", "along", "up")?;
    for (place, force) in places.iter().zip(&case.forces) {
        let [normal, along, up] = [force.normal_n, force.along_n, force.up_n].map(newtons);
        writeln!(text, "      {place:width$} {normal:>9} {along:>9} {up:>9}")?;
    }
    say(text, "normal: into the part; along: along the edge, the material on its left; up: out of the plane")
}

fn beside(text: &mut String, scene: &Scene, grasp: &Grasp, holding: &Holding) -> Written {
    let beside = Beside::of(scene, grasp, holding, holding.governing);
    match beside.formula {
        Ok(squeeze_n) => say(text, &format!("hand formula S W / (2 mu): {} N per finger", newtons(squeeze_n)))?,
        Err(why) => say(text, &format!("hand formula S W / (2 mu) does not apply: {why}"))?,
    }
    match beside.lies {
        Some(Lies::AlongFaces) => say(text, "the load lies along the faces: an equal squeeze of both fingers holds it"),
        Some(Lies::AlongAxis) => {
            say(text, "part of the load lies along the squeeze axis: one finger must back up or give")
        }
        None => Ok(()),
    }
}

fn bearing(text: &mut String, scene: &Scene, grasp: &Grasp, holding: &Holding) -> Written {
    let Some(squeeze_n) = holding.squeeze_n() else { return Ok(()) };
    let mut told: Vec<(String, Vec<String>)> = Vec::new();
    for (finger, contact) in grasp.contacts.iter().enumerate() {
        let bearing = scene.bearing(contact);
        let on = match bearing {
            Bearing::Face { mm2 } => format!("a pad face of {} mm2", newtons(mm2)),
            Bearing::Line { mm } => format!("a line of {} mm", newtons(mm)),
        };
        let words = format!("{} {} on {on}", length(bearing.load(squeeze_n)), bearing.unit());
        let number = (finger + 1).to_string();
        match told.iter_mut().find(|(other, _)| *other == words) {
            Some((_, numbers)) => numbers.push(number),
            None => told.push((words, vec![number])),
        }
    }
    for (words, numbers) in told {
        let plural = if numbers.len() == 1 { "" } else { "s" };
        say(text, &format!("at that squeeze {words} (finger{plural} {})", numbers.join(", ")))?;
    }
    Ok(())
}

fn standing(text: &mut String, scene: &Scene, grasp: &Grasp) -> Written {
    for (name, mu) in band(&scene.setup().friction) {
        let standing = scene.standing_at(grasp, mu);
        let at = match name {
            "sliding" => format!("once slip has begun (mu {})", ratio(mu)),
            _ => format!("at mu {} ({name})", ratio(mu)),
        };
        let holding = standing.holding.as_ref().map_or(String::new(), |holding| match holding.squeeze_n() {
            Some(n) => format!(
                ", loads {}, {} N each, {} N in all",
                if holding.held() { "held" } else { "NOT HELD" },
                newtons(n),
                newtons(in_all(n, grasp))
            ),
            None => ", loads NOT HELD by any squeeze".to_owned(),
        });
        say(text, &format!("{at}: {}{holding}", standing.verdict.word()))?;
    }
    Ok(())
}
