//! The comparison page: grasps side by side, what differs marked, the best of each line marked.

use super::super::compare;
use super::super::state::{Reading, State};
use super::{bars, number};
use crate::file::shown;
use crate::mechanics::{Holding, Verdict};
use crate::search::Standing;
use ratatui::text::{Line, Span};

/// Width of the names on the left, and of the signs before them.
const NAMES: usize = 13;

/// The lines of the page for a width.
pub(super) fn lines(state: &State, width: u16) -> Vec<Line<'static>> {
    let readings = compare::readings(state);
    let column = (usize::from(width).saturating_sub(NAMES) / readings.len().max(1)).clamp(8, 32);
    let cell = |text: &str| {
        let text = bars::cut(text, column.saturating_sub(2));
        let wide = Line::raw(text.as_str()).width();
        format!("{text}{}", " ".repeat(column.saturating_sub(wide)))
    };
    let heads: String = readings.iter().map(|(own, _)| cell(&own.name)).collect();
    let mut lines = vec![Line::styled(format!("{:NAMES$}{heads}", ""), state.look.title())];
    let read: Vec<_> = readings.into_iter().map(|(_, reading)| reading).collect();
    lines.extend(compare_all(state, &read).iter().map(|line| compared(state, line, &cell)));
    lines.push(Line::raw(""));
    let loads = match state.setup().loads.len() {
        0 => "no loads".to_owned(),
        count => number::count(count as u64, "load case", "load cases"),
    };
    let mu = number::mu(state.setup().friction.mu);
    lines.push(Line::styled(
        format!("all at mu {mu}, {loads}; no sign: all alike; ~ differs; ^ best of its line"),
        state.look.dim(),
    ));
    lines
}

fn compared(state: &State, line: &Compared, cell: &dyn Fn(&str) -> String) -> Line<'static> {
    let differs = line.differs();
    let style = if differs { state.look.plain() } else { state.look.dim() };
    let name = format!("{} {:<width$}", if differs { '~' } else { ' ' }, line.name, width = NAMES - 2);
    let mut spans = vec![Span::styled(name, style)];
    for (value, best) in line.values.iter().zip(&line.best) {
        let text = cell(&if *best { format!("{value} ^") } else { value.clone() });
        spans.push(Span::styled(text, if *best { state.look.title() } else { style }));
    }
    Line::from(spans)
}

/// One line of a comparison.
struct Compared {
    /// What is compared.
    name: &'static str,
    /// A value for each grasp.
    values: Vec<String>,
    /// Which of them are the best; none where there is no better or worse.
    best: Vec<bool>,
}

impl Compared {
    /// True when not all values read alike.
    fn differs(&self) -> bool {
        self.values.iter().any(|value| *value != self.values[0])
    }
}

/// A number that can be better or worse, read off a grasp; nothing where it has none.
struct Score {
    name: &'static str,
    /// Larger is better.
    up: bool,
    value: fn(&Reading) -> Option<f64>,
    told: fn(&Reading) -> String,
}

/// The lines of a comparison, for grasps as they read under the present knobs.
fn compare_all(state: &State, readings: &[Option<Reading>]) -> Vec<Compared> {
    let closed = |reading: &Reading| reading.assessment.verdict == Verdict::Closed;
    let all = |name: &'static str, told: &dyn Fn(&Reading) -> String| Compared {
        name,
        values: readings.iter().map(|reading| reading.as_ref().map_or("not on this part".to_owned(), told)).collect(),
        best: vec![false; readings.len()],
    };
    let scores: &[Score] = &[
        Score {
            name: "quality",
            up: true,
            value: |r| Some(r.assessment.quality),
            told: |r| number::quality(r.assessment.quality),
        },
        Score {
            name: "per finger",
            up: true,
            value: |r| Some(r.assessment.quality_per_finger),
            told: |r| number::quality(r.assessment.quality_per_finger),
        },
        Score {
            name: "mu needed",
            up: false,
            value: |r| r.assessment.friction_needed,
            told: |r| r.assessment.friction_needed.map_or("-".to_owned(), number::mu),
        },
        Score {
            name: "margin",
            up: true,
            value: |r| Some(r.assessment.friction_margin.unwrap_or(f64::INFINITY)),
            told: |r| number::margin(r.assessment.friction_margin),
        },
        Score {
            name: "place mm",
            up: true,
            value: |r| Some(r.assessment.placement.mm),
            told: |r| number::mm(r.assessment.placement.mm),
        },
    ];
    let loads: &[Score] = &[
        Score {
            name: "squeeze N",
            up: false,
            value: |r| r.assessment.holding.as_ref().and_then(Holding::squeeze_n),
            told: |r| {
                let squeeze = r.assessment.holding.as_ref().and_then(Holding::squeeze_n);
                squeeze.map_or("none".to_owned(), number::mm)
            },
        },
        Score {
            name: "load",
            up: true,
            value: |r| {
                let holding = r.assessment.holding.as_ref()?;
                holding.held().then(|| holding.load_margin().unwrap_or(f64::INFINITY))
            },
            told: |r| {
                let holding = r.assessment.holding.as_ref();
                holding.map_or(String::new(), |holding| number::load(holding.load_margin(), holding.held()))
            },
        },
    ];
    let scored = |score: &Score| {
        let mut line = all(score.name, &score.told);
        // An open grasp has no scores to be better by.
        let own = |reading: &Option<Reading>| reading.as_ref().filter(|r| closed(r)).and_then(score.value);
        let values: Vec<Option<f64>> =
            readings.iter().map(own).map(|v| v.map(|v| if score.up { v } else { -v })).collect();
        let best = values.iter().flatten().copied().fold(f64::NEG_INFINITY, f64::max);
        let differs = line.differs();
        line.best =
            values.iter().map(|v| differs && v.is_some_and(|v| v >= best - 1e-9 * (1.0 + best.abs()))).collect();
        line
    };
    let mut lines = vec![all("verdict", &|r| r.assessment.verdict.word().to_owned())];
    lines.extend(scores.iter().map(scored));
    if !state.setup().loads.is_empty() {
        lines.extend(loads.iter().map(scored));
        lines.push(all("asks most", &|r| {
            r.assessment.holding.as_ref().map_or(String::new(), |holding| shown(&holding.governing_case().name))
        }));
    }
    lines.push(all("band", &|r| {
        let holds =
            |(name, standing): &(&str, Standing)| format!("{name} {}", if standing.holds() { "yes" } else { "NO" });
        r.band.iter().map(holds).collect::<Vec<_>>().join(", ")
    }));
    lines.push(all("fits", &|r| if r.grasp.fits() { "yes".to_owned() } else { "NO".to_owned() }));
    let fingers = readings.iter().flatten().map(|r| r.grasp.spots.len()).max().unwrap_or(0);
    for finger in 0..fingers {
        const NAMES: [&str; 6] = ["finger 1", "finger 2", "finger 3", "finger 4", "finger 5", "finger 6"];
        let Some(name) = NAMES.get(finger) else { break };
        lines.push(all(name, &|r| {
            let spot = r.grasp.spots.get(finger);
            spot.map_or("-".to_owned(), |s| format!("{}:{}@{}", s.edge.ring, s.edge.edge, number::mm(s.along_mm)))
        }));
    }
    lines.retain(|line| line.values.iter().any(|value| !value.is_empty()));
    lines
}
