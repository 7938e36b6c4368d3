//! Plots: one family's placements as a box of parameters, cut up best bound first until the family is settled.

use super::super::families::Family;
use super::Setting;
use super::gauge::{Bound, Gauge, Spans, Spots};
use super::improve;
use super::rail::{Span, half_mm, middle};
use crate::hand::{FingerCount, JawRun};
use std::cmp::Ordering;
use std::collections::BinaryHeap;

/// Intervals narrower than this part of the torque scale are not cut any more.
const NARROWEST: f64 = 1e-12;

/// A family made ready: its gauge, and how its parameters place the fingers. Fingers that close freely have a parameter
/// each, the position along the edge; parallel jaws have one together, the distance along their run.
pub(super) struct Plot<'a> {
    pub gauge: Gauge<'a>,
    run: Option<&'a JawRun>,
    /// Number of parameters.
    pub dims: usize,
    /// Whether a parameter runs along the same stretch as the one before it.
    repeats: [bool; FingerCount::MOST],
    narrowest_mm: f64,
}

/// A box with its bound.
#[derive(Clone, Copy)]
struct Piece {
    bound: Bound,
    spans: Spans,
}

impl PartialEq for Piece {
    fn eq(&self, other: &Self) -> bool {
        self.cmp(other) == Ordering::Equal
    }
}

impl Eq for Piece {}

impl PartialOrd for Piece {
    fn partial_cmp(&self, other: &Self) -> Option<Ordering> {
        Some(self.cmp(other))
    }
}

impl Ord for Piece {
    /// Larger means a larger bound. Boxes of one family differ in where they begin, so that no two are equal.
    fn cmp(&self, other: &Self) -> Ordering {
        let begins = |piece: &Self| piece.spans.map(|span| span[0]);
        self.bound.merit.total_cmp(&other.bound.merit).then_with(|| {
            let mut pairs = begins(other).into_iter().zip(begins(self));
            pairs.find_map(|(a, b)| Some(a.total_cmp(&b)).filter(|order| order.is_ne())).unwrap_or(Ordering::Equal)
        })
    }
}

/// A placement found, in a family's parameters.
#[derive(Debug, Clone, Copy)]
pub(super) struct Lead {
    pub merit: f64,
    pub at: Spots,
}

/// What is known of a family: the best found, the boxes that may hold better, and the largest bound of those that were
/// dropped.
pub(super) struct State {
    pub family: Family,
    pub lead: Option<Lead>,
    /// The bound on the whole family, until it is taken up.
    first: Option<Bound>,
    pieces: BinaryHeap<Piece>,
    /// Boxes that need not be cut, but may hold better than the first row.
    aside: Vec<Piece>,
    dropped: f64,
}

/// What decides whether a box is cut.
#[derive(Clone, Copy)]
pub(super) struct Aim {
    /// Families whose bound is no larger are of no interest.
    pub level: f64,
    /// Merit of the first row: a box whose bound is larger is kept in mind even when it is not cut.
    pub first: f64,
    /// The first row is polished: the search goes on beyond the gap.
    pub polish: bool,
}

impl State {
    /// Nothing but that no placement has a larger merit than `bound`.
    pub(super) fn new(family: Family, bound: Bound, lead: Option<Lead>) -> Self {
        Self {
            family,
            lead,
            first: Some(bound),
            pieces: BinaryHeap::new(),
            aside: Vec::new(),
            dropped: f64::NEG_INFINITY,
        }
    }

    /// True when boxes were put aside.
    pub(super) fn has_more(&self) -> bool {
        !self.aside.is_empty()
    }

    /// Takes up again what was put aside.
    pub(super) fn take_up(&mut self) {
        self.pieces.extend(self.aside.drain(..));
    }

    /// True when no box is left that may be cut further.
    pub(super) fn is_settled(&self) -> bool {
        self.first.is_none() && self.pieces.is_empty()
    }

    /// The largest bound of the boxes that may be cut further.
    pub(super) fn open_bound(&self) -> f64 {
        let first = self.first.map_or(f64::NEG_INFINITY, |bound| bound.merit);
        self.pieces.peek().map_or(first, |piece| piece.bound.merit)
    }

    /// No placement of the family has a larger merit.
    pub(super) fn bound(&self) -> f64 {
        let lead = self.lead.map_or(f64::NEG_INFINITY, |lead| lead.merit);
        let aside = self.aside.iter().map(|piece| piece.bound.merit).fold(self.dropped, f64::max);
        self.open_bound().max(aside).max(lead)
    }

    /// Leaves a box as it is.
    fn leave(&mut self, piece: Piece, first: f64) {
        if piece.bound.merit > first {
            self.aside.push(piece);
        } else {
            self.dropped = self.dropped.max(piece.bound.merit);
        }
    }
}

impl<'a> Plot<'a> {
    pub(super) fn new(setting: &'a Setting<'a>, family: &Family) -> Self {
        let mut repeats = [false; FingerCount::MOST];
        let narrowest_mm = NARROWEST * setting.scene.frame().scale_mm;
        if let Some(run) = setting.run(family) {
            let rails = run.stretches.map(|stretch| &setting.rails[stretch]);
            return Self { gauge: Gauge::new(setting, &rails), run: Some(run), dims: 1, repeats, narrowest_mm };
        }
        let on = family.stretches();
        for (repeat, pair) in repeats[1..].iter_mut().zip(on.windows(2)) {
            *repeat = pair[0] == pair[1];
        }
        let mut rails = [&setting.rails[0]; FingerCount::MOST];
        for (rail, &stretch) in rails.iter_mut().zip(on) {
            *rail = &setting.rails[stretch as usize];
        }
        Self { gauge: Gauge::new(setting, &rails[..on.len()]), run: None, dims: on.len(), repeats, narrowest_mm }
    }

    /// Every placement of the family.
    pub(super) fn whole(&self) -> Spans {
        let mut whole = [[0.0; 2]; FingerCount::MOST];
        match self.run {
            Some(run) => whole[0] = [0.0, run.length_mm()],
            None => whole.iter_mut().zip(&self.gauge.rails[..self.dims]).for_each(|(span, rail)| *span = rail.whole),
        }
        whole
    }

    /// Intervals of the fingers over a box.
    fn fingers(&self, spans: &Spans) -> Spans {
        let Some(run) = self.run else { return *spans };
        let (from, to) = (run.along_mm(spans[0][0]), run.along_mm(spans[0][1]));
        let mut fingers = [[0.0; 2]; FingerCount::MOST];
        for finger in [0, 1] {
            fingers[finger] = [from[finger].min(to[finger]), from[finger].max(to[finger])];
        }
        fingers
    }

    /// Positions of the fingers.
    pub(super) fn spots(&self, at: &Spots) -> Spots {
        let Some(run) = self.run else { return *at };
        let mut spots = [0.0; FingerCount::MOST];
        spots[..2].copy_from_slice(&run.along_mm(at[0]));
        spots
    }

    /// The exact merit of a placement, if it is a grasp and its merit is above `beat`.
    pub(super) fn value(&mut self, at: &Spots, beat: f64) -> Option<f64> {
        let spots = self.spots(at);
        let k = self.gauge.k;
        self.gauge.value(&spots[..k], beat)
    }

    /// The bound on a box, its cut told as a parameter; one at or below `level` may be any such.
    pub(super) fn bound(&mut self, spans: &Spans, level: f64) -> Bound {
        let fingers = self.fingers(spans);
        let k = self.gauge.k;
        let bound = self.gauge.bound(&fingers[..k], level);
        if self.run.is_some() { Bound { cut: 0, ..bound } } else { bound }
    }

    /// Cuts boxes, the largest bound first, until none is above `level` nor above what is good enough beside the family's
    /// own best, or so many have been looked at. Returns how many boxes were looked at.
    pub(super) fn settle(&mut self, state: &mut State, aim: Aim, at_most: u64) -> u64 {
        let goal = *self.gauge.goal();
        let mut boxes = 0;
        if let Some(bound) = state.first.take() {
            let whole = self.whole();
            self.look(state, &whole, aim.level);
            state.pieces.push(Piece { bound, spans: whole });
        }
        loop {
            let best = Some(aim.first).filter(|first| first.is_finite());
            let own = state.lead.map_or(f64::NEG_INFINITY, |lead| {
                if aim.polish { goal.nearly(lead.merit) } else { goal.enough(Some(lead.merit), best) }
            });
            let level = aim.level.max(own);
            let Some(top) = state.pieces.peek().copied() else { return boxes };
            if top.bound.merit <= level {
                for piece in std::mem::take(&mut state.pieces) {
                    state.leave(piece, aim.first);
                }
                return boxes;
            }
            if boxes + 2 > at_most {
                return boxes;
            }
            state.pieces.pop();
            let Some(halves) = self.halves(&top) else {
                state.dropped = state.dropped.max(top.bound.merit);
                continue;
            };
            for spans in halves {
                if self.is_mirrored(&spans) || self.is_crowded(&spans) {
                    continue;
                }
                boxes += 1;
                let mut bound = self.bound(&spans, level);
                bound.merit = bound.merit.min(top.bound.merit);
                if bound.merit <= level {
                    state.leave(Piece { bound, spans }, aim.first);
                    continue;
                }
                self.look(state, &spans, level);
                state.pieces.push(Piece { bound, spans });
            }
        }
    }

    /// Looks at the middle of a box for a better placement.
    fn look(&mut self, state: &mut State, spans: &Spans, level: f64) {
        let at = spans.map(middle);
        let beat = state.lead.map_or(f64::NEG_INFINITY, |lead| lead.merit);
        if let Some(merit) = self.value(&at, beat) {
            let lead = Lead { merit, at };
            // A family that is behind the list is improved by cutting alone.
            let near = merit + NEAR * merit.abs() >= level || state.lead.is_none();
            state.lead = Some(if near { improve::climb(self, lead) } else { lead });
        }
    }

    /// A box cut in two; nothing when it is too narrow to be cut.
    fn halves(&self, piece: &Piece) -> Option<[Spans; 2]> {
        let spans = &piece.spans;
        let widest = super::gauge::widest(&spans[..self.dims]);
        let cut = if half_mm(spans[piece.bound.cut]) > self.narrowest_mm { piece.bound.cut } else { widest };
        if !(half_mm(spans[cut]) > self.narrowest_mm) {
            return None;
        }
        let at = middle(spans[cut]);
        let mut halves = [*spans; 2];
        halves[0][cut][1] = at;
        halves[1][cut][0] = at;
        Some(halves)
    }

    /// True when fingers on one stretch stand in falling order all over a box: relabelled it is looked at elsewhere.
    fn is_mirrored(&self, spans: &Spans) -> bool {
        (1..self.dims).any(|i| self.repeats[i] && spans[i][1] < spans[i - 1][0])
    }

    /// True when two fingers come too near wherever they stand in a box.
    pub(super) fn is_crowded(&self, spans: &Spans) -> bool {
        let fingers = self.fingers(spans);
        let (rails, k) = (&self.gauge.rails, self.gauge.k);
        self.gauge.gaps().never_kept(&rails[..k], &fingers[..k])
    }

    /// Cuts a position to the interval of its parameter.
    pub(super) fn held(&self, dim: usize, at: f64, whole: &[Span]) -> f64 {
        at.clamp(whole[dim][0], whole[dim][1])
    }
}

/// Families this near to the list are worth a climb.
const NEAR: f64 = 0.1;
