//! Friction of pairs of surfaces: values that are quoted, who quotes them, and a low planning value for a first estimate.
//!
//! Friction belongs to a pair in a condition, not to a material: quotes for one pair differ by ten times and more. So a
//! row keeps every quote apart, and its planning values are marked as having no source.

mod table;

pub use table::PAIRS;

use super::friction::{Condition, FrictionBand};
use crate::part::Source;
use std::fmt;

/// A coefficient as somebody quotes it.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Value {
    /// One number.
    One(f64),
    /// From a number to a larger one.
    Between(f64, f64),
    /// Up to a number.
    AtMost(f64),
    /// From a number up.
    AtLeast(f64),
}

impl Value {
    /// The lowest number it names; nothing where only a highest is given.
    pub fn lowest(self) -> Option<f64> {
        match self {
            Self::One(mu) | Self::Between(mu, _) | Self::AtLeast(mu) => Some(mu),
            Self::AtMost(_) => None,
        }
    }

    /// The highest number it names.
    pub fn highest(self) -> f64 {
        match self {
            Self::One(mu) | Self::Between(_, mu) | Self::AtMost(mu) | Self::AtLeast(mu) => mu,
        }
    }

    fn middle(self) -> Option<f64> {
        self.lowest().map(|low| f64::midpoint(low, self.highest()))
    }
}

impl fmt::Display for Value {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::One(mu) => f.write_str(&decimals(*mu)),
            Self::Between(low, high) => write!(f, "{}-{}", decimals(*low), decimals(*high)),
            Self::AtMost(mu) => write!(f, "to {}", decimals(*mu)),
            Self::AtLeast(mu) => write!(f, "{} up", decimals(*mu)),
        }
    }
}

/// A coefficient with two decimals, or with all it has where those are more.
fn decimals(mu: f64) -> String {
    let (plain, two) = (mu.to_string(), format!("{mu:.2}"));
    if plain.len() > two.len() { plain } else { two }
}

/// What one source says of a pair.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Quote {
    /// State of the surfaces.
    pub condition: Condition,
    /// Coefficient before slip.
    pub fixed: Option<Value>,
    /// Coefficient once slip has begun.
    pub sliding: Option<Value>,
    /// What exactly it is about, where that is narrower than the pair; empty otherwise.
    pub about: &'static str,
    /// Who quotes it.
    pub source: &'static Source,
}

impl fmt::Display for Quote {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match (self.fixed, self.sliding) {
            (Some(fixed), Some(sliding)) => write!(f, "{fixed}, sliding {sliding}")?,
            (Some(fixed), None) => write!(f, "{fixed}")?,
            (None, Some(sliding)) => write!(f, "sliding {sliding}")?,
            (None, None) => f.write_str("no value")?,
        }
        if !self.about.is_empty() {
            write!(f, " {}", self.about)?;
        }
        write!(f, " ({})", self.source)
    }
}

/// A pair of surfaces, what is quoted of it, and what to plan with.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Pair {
    /// The two surfaces.
    pub name: &'static str,
    /// What is quoted.
    pub quotes: &'static [Quote],
    /// Planning value, clean and dry.
    pub plan_dry: f64,
    /// Planning value, oily; nothing where the table has none.
    pub plan_oily: Option<f64>,
    /// What else to know; empty when nothing.
    pub note: &'static str,
}

/// What every planning value is marked with.
pub const PLAN_MARK: &str = "planning value, no source; test before relying on it";

/// What the table of pairs teaches, to stand wherever it is listed.
pub const LESSON: &str = "The spread is the point: friction belongs to a pair of surfaces in a condition, not to a \
material, and quotes for one pair differ by ten times and more. The planning values are low picks without a source. Rank \
on the low end of a band, and measure your own pair before relying on any number.";

impl Pair {
    /// The planning value in a condition. Wet surfaces have none: what is quoted for them is too little.
    pub fn plan(&self, condition: Condition) -> Option<f64> {
        match condition {
            Condition::Dry => Some(self.plan_dry),
            Condition::Oily => self.plan_oily,
            Condition::Wet => None,
        }
    }

    /// What is quoted for a condition.
    pub fn quotes_for(&self, condition: Condition) -> impl Iterator<Item = &'static Quote> {
        self.quotes.iter().filter(move |quote| quote.condition == condition)
    }

    fn fixed(&self, condition: Condition) -> impl Iterator<Item = Value> {
        self.quotes_for(condition).filter_map(|quote| quote.fixed)
    }

    /// Everything quoted before slip in a condition, from the lowest number to the highest.
    pub fn spread(&self, condition: Condition) -> Option<Value> {
        span(&self.fixed(condition).collect::<Vec<_>>())
    }

    /// The same once slip has begun.
    pub fn sliding_spread(&self, condition: Condition) -> Option<Value> {
        span(&self.quotes_for(condition).filter_map(|quote| quote.sliding).collect::<Vec<_>>())
    }

    /// The spread in a few characters: of sliding with an `s` where nothing else is quoted, `-` where nothing is.
    pub fn spread_word(&self, condition: Condition) -> String {
        match (self.spread(condition), self.sliding_spread(condition)) {
            (Some(fixed), _) => fixed.to_string(),
            (None, Some(sliding)) => format!("{sliding} s"),
            (None, None) => "-".to_owned(),
        }
    }

    /// What is quoted, a line for each condition, and the note.
    pub fn lines(&self) -> Vec<String> {
        let mut lines = Vec::new();
        for condition in [Condition::Dry, Condition::Oily, Condition::Wet] {
            let quotes: Vec<String> = self.quotes_for(condition).map(Quote::to_string).collect();
            if !quotes.is_empty() {
                lines.push(format!("{}: {}", condition.word(), quotes.join("; ")));
            }
        }
        if !self.note.is_empty() {
            lines.push(format!("note: {}", self.note));
        }
        lines
    }

    /// The friction to start from in a condition, or nothing where there is no planning value. `mu` is the planning
    /// value; `low` too, unless a quote lies below it; `nominal` is the median of what is quoted before slip, each quote
    /// at its middle, and `high` the highest number quoted, both only where they lie above what stands before them.
    /// There is no `sliding`: most quotes of it lie above the planning value, and sliding above `mu` cannot be.
    pub fn band(&self, condition: Condition) -> Option<FrictionBand> {
        let mu = self.plan(condition)?;
        let spread = self.spread(condition);
        let low = spread.and_then(Value::lowest).map_or(mu, |lowest| lowest.min(mu));
        let nominal = median(self.fixed(condition).filter_map(Value::middle).collect()).filter(|&middle| middle >= mu);
        let high = spread.map(Value::highest).filter(|&highest| highest > nominal.unwrap_or(mu));
        Some(FrictionBand {
            mu,
            low: Some(low),
            nominal,
            high,
            sliding: None,
            condition: Some(condition),
            source: Some(self.told(condition, mu)),
        })
    }

    /// The words that go into a setup as the source of a band.
    fn told(&self, condition: Condition, mu: f64) -> String {
        let mut text = format!("{}, {}: {} is a {PLAN_MARK}", self.name, condition.word(), decimals(mu));
        let quotes: Vec<String> = self
            .quotes_for(condition)
            .filter(|quote| quote.fixed.is_some())
            .map(|quote| Quote { sliding: None, ..*quote }.to_string())
            .collect();
        if !quotes.is_empty() {
            text.push_str(&format!("; quoted: {}", quotes.join(", ")));
        }
        text
    }
}

fn span(values: &[Value]) -> Option<Value> {
    let lowest = values.iter().copied().filter_map(Value::lowest).reduce(f64::min);
    let highest = values.iter().copied().map(Value::highest).reduce(f64::max)?;
    Some(match lowest {
        None => Value::AtMost(highest),
        Some(lowest) if lowest < highest => Value::Between(lowest, highest),
        Some(one) => Value::One(one),
    })
}

fn median(mut values: Vec<f64>) -> Option<f64> {
    values.sort_by(f64::total_cmp);
    let upper = *values.get(values.len() / 2)?;
    let lower = values[(values.len() - 1) / 2];
    Some((f64::midpoint(lower, upper) * 1e4).round() / 1e4)
}
