//! The panel of a grasp in hand: its fingers, and every score beside what it was.

use super::super::by_hand::ByHand;
use super::super::state::{Reading, State};
use super::{bars, number, put, titled};
use crate::mechanics::{Holding, Verdict};
use ratatui::buffer::Buffer;
use ratatui::layout::Rect;
use ratatui::style::Style;

/// Draws the panel in the place of the table.
pub(super) fn render(state: &State, hand: &ByHand, area: Rect, buf: &mut Buffer) {
    let (undo, redo) = hand.history();
    let right = format!("step {} mm  undo {undo}  redo {redo}", number::given(hand.step_mm()));
    let inside = titled(state, area, "by hand", &right, buf);
    let mut lines = vec![("  # edge        at mm   room mm".to_owned(), state.look.dim())];
    // On a low panel the picked finger stays in sight, and the scores below it.
    let fingers = fingers(state, hand);
    let room = usize::from(inside.height).saturating_sub(lines.len()).max(1);
    let first = (hand.picked + 1).saturating_sub(room).min(fingers.len());
    lines.extend(fingers.into_iter().skip(first));
    lines.extend(scores(state, hand));
    for ((text, style), y) in lines.into_iter().zip(inside.top()..inside.bottom()) {
        put(buf, Rect { y, height: 1, ..inside }, &bars::cut(&text, usize::from(inside.width)), style);
    }
}

fn fingers(state: &State, hand: &ByHand) -> Vec<(String, Style)> {
    let row = |(finger, spot): (usize, &crate::search::Spot)| {
        let picked = finger == hand.picked;
        let locked = hand.now.locked.get(finger).copied().unwrap_or(false);
        let room = state.reading.as_ref().and_then(|reading| reading.grasp.rooms_mm.get(finger));
        let room =
            room.map_or(String::new(), |room| if *room < 0.0 { "does not fit".to_owned() } else { number::mm(*room) });
        let text = format!(
            "{} {} {:<8} {:>8} {room:>9}{}",
            if picked { '>' } else { ' ' },
            finger + 1,
            format!("{}:{}", spot.edge.ring, spot.edge.edge),
            format!("{:.2}", spot.along_mm),
            if locked { "  LOCKED" } else { "" },
        );
        (text, if picked { state.look.selected() } else { state.look.plain() })
    };
    hand.now.spots.iter().enumerate().map(row).collect()
}

/// Every score as it was and as it is; a sign says which way it went.
fn scores(state: &State, hand: &ByHand) -> Vec<(String, Style)> {
    let Some(now) = &state.reading else { return Vec::new() };
    let before = hand.began.as_ref();
    let mut lines = vec![(format!("  {:<10} {:>10} {:>12}", "", "before", "now"), state.look.dim())];
    let mut tell = |name: &str, value: &dyn Fn(&Reading) -> (String, Option<f64>)| {
        let (is, score) = value(now);
        let (was, old) = before.map_or((String::new(), None), value);
        // A change that is not shown is none.
        let sign = match (score, old) {
            (Some(score), Some(old)) if is != was && score > old => '+',
            (Some(score), Some(old)) if is != was && score < old => '-',
            _ => ' ',
        };
        let style = if sign == ' ' { state.look.plain() } else { state.look.title() };
        lines.push((format!("{sign} {name:<10} {was:>10} {is:>12}"), style));
    };
    tell("quality", &|r| (number::quality(r.assessment.quality), Some(r.assessment.quality)));
    tell("margin", &|r| {
        let margin = r.assessment.friction_margin;
        let closed = r.assessment.verdict == Verdict::Closed;
        (number::margin(margin), Some(if closed { margin.unwrap_or(f64::INFINITY) } else { margin.unwrap_or(0.0) }))
    });
    tell("place mm", &|r| (number::mm(r.assessment.placement.mm), Some(r.assessment.placement.mm)));
    if !state.setup().loads.is_empty() {
        tell("squeeze N", &|r| {
            let squeeze = r.assessment.holding.as_ref().and_then(Holding::squeeze_n);
            (squeeze.map_or("none".to_owned(), number::mm), Some(-squeeze.unwrap_or(f64::INFINITY)))
        });
        tell("load", &|r| {
            let Some(holding) = &r.assessment.holding else { return (String::new(), None) };
            let held = f64::from(u8::from(holding.held()));
            (number::load(holding.load_margin(), holding.held()), Some(held * holding.load_margin().unwrap_or(1.0)))
        });
    }
    tell("per finger", &|r| (number::quality(r.assessment.quality_per_finger), Some(r.assessment.quality_per_finger)));
    lines
}
