//! The gauge: bounds on boxes of placements of one family, and exact merits of single placements.
//!
//! A box gives each finger an interval of its stretch. The contacts that cover it ([`super::rail`]) are scored as if they were
//! a grasp, with the very routines that score grasps: every score grows with the wrench set, so the score of the covering
//! contacts is one that no placement in the box exceeds. Closure is a bound of its own: what does not close with the covering
//! contacts closes nowhere in the box. So are the floors and the loads.
//!
//! Cheap before dear: the wall of the force polygon before any torque, the room before the torque, the quality before the
//! quality per finger (at most k times it), one closure test at the friction to beat before the friction itself is sought.

use super::super::family_forces::NO_LEVER;
use super::super::order::Key;
use super::goal::Goal;
use super::loads::Loads;
use super::rail::{Contacts, Gaps, Rail, Span, contacts_over, half_mm, score_over};
use super::tilt::{Target, Tilt};
use super::{Setting, Tally};
use crate::hand::FingerCount;
use crate::mechanics::force_polygon::{CERTAIN, ForcePolygon, PlanarScore};
use crate::mechanics::friction::{self, CLOSED, UnitForces};
use crate::mechanics::{Lever, MARGINAL, quality};
use nalgebra::Vector3;

/// Intervals of the fingers of a grasp.
pub(super) type Spans = [Span; FingerCount::MOST];
/// Positions of the fingers of a grasp, mm along their edges.
pub(super) type Spots = [f64; FingerCount::MOST];

/// A bound on a box, and the finger whose interval is best cut next.
#[derive(Clone, Copy)]
pub(super) struct Bound {
    /// No placement in the box has a larger merit; minus infinity when none there is a grasp at all.
    pub merit: f64,
    pub cut: usize,
}

const NOTHING: Bound = Bound { merit: f64::NEG_INFINITY, cut: 0 };

/// Rounding that a placement may be off by, as a part of the torque scale.
const PLACEMENT_HAIR: f64 = 1e-10;
/// Rounding that a friction factor may be off by.
const FACTOR_HAIR: f64 = 1e-9;
/// Halvings of a bracket on the placement of a grasp on arcs, and on that of a box of them.
const HALVINGS: [u32; 2] = [44, 16];

/// Scores boxes and placements of one family.
pub(super) struct Gauge<'a> {
    setting: &'a Setting<'a>,
    pub rails: [&'a Rail<'a>; FingerCount::MOST],
    pub k: usize,
    /// One friction coefficient for all fingers, none of them on an arc: the forces are the same all over the family.
    polygon: Option<(f64, ForcePolygon)>,
    /// The friction coefficient, where it is one for all fingers.
    mu: Option<f64>,
    /// The forces may positively span the plane.
    spans: bool,
    curved: bool,
    loads: Option<Loads<'a>>,
    /// Placements looked at.
    pub tally: Tally,
}

impl<'a> Gauge<'a> {
    #[expect(clippy::float_cmp, reason = "equal means copied from the same setting, digit for digit")]
    pub(super) fn new(setting: &'a Setting<'a>, on: &[&'a Rail<'a>]) -> Self {
        let k = on.len();
        let mut rails = [on[0]; FingerCount::MOST];
        rails[..k].copy_from_slice(on);
        let curved = on.iter().any(|rail| rail.bend > 0.0);
        let mu = on.iter().all(|rail| rail.mu == on[0].mu).then_some(on[0].mu);
        let mut gauge =
            Self { setting, rails, k, polygon: None, mu, spans: true, curved, loads: None, tally: Tally::default() };
        if !curved {
            let (mut levers, mut mus) = ([on[0].at_middle(on[0].whole); FingerCount::MOST], [0.0; FingerCount::MOST]);
            for (finger, rail) in on.iter().enumerate() {
                (levers[finger], mus[finger]) = (rail.at_middle(rail.whole), rail.mu);
            }
            if let Some(mu) = mu {
                let polygon = ForcePolygon::of_levers(&levers[..k], mu);
                gauge.spans = polygon.wall() > MARGINAL;
                gauge.polygon = Some((mu, polygon));
            } else {
                // Scaling a force changes no verdict.
                let unit = ForcePolygon::new(UnitForces::new(&levers[..k], &mus[..k], 1.0).forces());
                gauge.spans = unit.wall() > 0.0;
            }
        }
        if gauge.spans {
            gauge.loads = Loads::new(setting.scene, on);
        }
        gauge
    }

    fn rails(&self) -> &[&'a Rail<'a>] {
        &self.rails[..self.k]
    }

    /// Closure, quality and torques of covering contacts, none of them below the truth.
    fn planar(&self, contacts: &Contacts) -> PlanarScore {
        if let Some((mu, polygon)) = &self.polygon {
            let score = polygon.score(&polygon.heights_of_levers(contacts.levers(), *mu));
            if score.certain {
                return PlanarScore { signed_quality: score.signed_quality + CERTAIN, ..score };
            }
        }
        contacts.by_definition()
    }

    /// The bound on a box. One at or below `level` may be any such; above it is as good as it gets.
    pub(super) fn bound(&mut self, spans: &[Span], level: f64) -> Bound {
        if !self.spans {
            return NOTHING;
        }
        let goal = &self.setting.goal;
        let wall = self.polygon.as_ref().map_or(f64::INFINITY, |(_, polygon)| polygon.wall());
        let longest = widest(spans);
        if goal.key == Key::Quality && wall <= level {
            return Bound { merit: wall, cut: longest };
        }
        let (room_mm, nearest) = self.room_mm(spans);
        let placement_floor = self.setting.scene.setup().floors.placement_mm;
        if goal.key == Key::Placement && room_mm <= level {
            return Bound { merit: room_mm, cut: nearest };
        }
        if room_mm < placement_floor {
            return NOTHING;
        }
        let Some(contacts) = contacts_over(self.rails(), spans, |rail| rail.mu) else {
            return Bound { merit: self.most(room_mm), cut: longest };
        };
        let score =
            if self.curved { score_over(self.rails(), spans, |rail| rail.mu) } else { Some(self.planar(&contacts)) };
        let Some(score) = score else { return Bound { merit: self.most(room_mm), cut: longest } };
        let floors = &self.setting.scene.setup().floors;
        if !(score.signed_quality > MARGINAL.max(floors.quality)) {
            return NOTHING;
        }
        let torque_mm = self.torque_mm(&score);
        if torque_mm < placement_floor {
            return NOTHING;
        }
        let bound = match goal.key {
            Key::Quality => Bound { merit: score.signed_quality, cut: self.swinging(&score.direction, spans) },
            Key::QualityPerFinger => self.per_finger(&contacts, &score, spans, level),
            Key::Placement => {
                let beside = room_mm > torque_mm || BESIDE * half_mm(spans[longest]) > half_mm(spans[nearest]);
                let (_, merit) = self.placement(spans, torque_mm.min(room_mm), level);
                Bound { merit, cut: if beside { longest } else { nearest } }
            }
            Key::Friction => Bound { merit: -self.least_factor(spans, &contacts, level), cut: longest },
            Key::Squeeze | Key::LoadMargin => Bound { merit: 0.0, cut: longest },
        };
        if bound.merit <= level && !goal.key.is_by_squeeze() {
            return bound;
        }
        if let Some(merit) = self.tilted(spans, level) {
            return Bound { merit, ..bound };
        }
        if floors.friction_margin > 1.0 && !self.may_close(spans, &contacts, 1.0 / floors.friction_margin) {
            return NOTHING;
        }
        self.under_load(bound, &contacts, spans, level)
    }

    /// The finger whose push in the weakest direction changes most over its interval, one that pushes farthest counting more:
    /// cutting another does not move that facet, but may let a weaker one come forward.
    fn swinging(&self, u: &Vector3<f64>, spans: &[Span]) -> usize {
        let longest = widest(spans);
        let scale_mm = self.setting.scene.frame().scale_mm;
        let (mut swings, mut reaches) = ([0.0; FingerCount::MOST], [0.0; FingerCount::MOST]);
        let mut most = f64::NEG_INFINITY;
        for (finger, (rail, span)) in self.rails().iter().zip(spans).enumerate() {
            let half = half_mm(*span);
            let middle = farthest(&rail.at_middle(*span), rail.mu, u);
            let ends = span.map(|end| farthest(&rail.at_middle([end, end]), rail.mu, u));
            let swing = ends.into_iter().map(|end| (end - middle).abs()).fold(0.0, f64::max);
            swings[finger] = swing + FLAT * half / scale_mm;
            reaches[finger] = ends.into_iter().fold(middle, f64::max);
            most = reaches[finger].max(most);
        }
        let mut best = (0.0, longest);
        for finger in 0..self.k {
            let counts = if reaches[finger] >= most - 1e-9 { 1.0 } else { BESIDE };
            if counts * swings[finger] > best.0 {
                best = (counts * swings[finger], finger);
            }
        }
        best.1
    }

    /// A bound at or below `level` by directions that turn with the placement ([`super::tilt`]), where there is one.
    fn tilted(&self, spans: &[Span], level: f64) -> Option<f64> {
        let (mut levers, mut mus) = ([NO_LEVER; FingerCount::MOST], [0.0; FingerCount::MOST]);
        for (finger, (rail, span)) in self.rails().iter().zip(spans).enumerate() {
            (levers[finger], mus[finger]) = (rail.at_middle(*span), rail.mu);
        }
        let (levers, mus) = (&levers[..self.k], &mut mus[..self.k]);
        let unit_mm = self.setting.scene.frame().scale_mm;
        let (target, per_short) = match self.setting.goal.key {
            Key::Quality if level > 0.0 => (Target { push: level, torque: 0.0 }, 1.0),
            Key::Placement if level > 0.0 => (Target { push: 0.0, torque: level / unit_mm }, unit_mm),
            Key::Friction if (-1.0..0.0).contains(&level) => {
                // Closure with that little friction; scaling a force changes no verdict.
                let polygon = ForcePolygon::new(UnitForces::new(levers, mus, -level).forces());
                mus.iter_mut().for_each(|mu| *mu *= -level);
                let tilt = Tilt::new(self.rails(), spans, levers, mus, |mu| 1.0 / mu.hypot(1.0), &polygon);
                return tilt.short_by(Target { push: 0.0, torque: 0.0 }).map(|_| level);
            }
            _ => return None,
        };
        let mu = self.mu?;
        let own;
        let polygon = match &self.polygon {
            Some((_, polygon)) => polygon,
            None => {
                own = ForcePolygon::of_levers(levers, mu);
                &own
            }
        };
        let short = Tilt::new(self.rails(), spans, levers, mus, |_| 1.0, polygon).short_by(target)?;
        Some((level - short * per_short).max(0.0))
    }

    /// The bound once the loads have been asked too.
    fn under_load(&mut self, bound: Bound, contacts: &Contacts, spans: &[Span], level: f64) -> Bound {
        let Some(mut loads) = self.loads.take() else { return bound };
        let wander = if self.curved { loads.wander(self.rails(), spans) } else { 0.0 };
        // On arcs the loads are asked at the middle, and the reach enlarged.
        let at_middle = if self.curved { self.at_middle(spans) } else { *contacts };
        let most_n = loads.most_n;
        let key = self.setting.goal.key;
        let bound = if key.is_by_squeeze() {
            let unit_n = loads.unit_n(key);
            let squeeze_n = loads.at_least_n(&at_middle, wander, most_n.min(-level * unit_n));
            let held = squeeze_n.is_finite() && squeeze_n <= most_n * (1.0 + FACTOR_HAIR);
            if held { Bound { merit: -squeeze_n / unit_n, ..bound } } else { NOTHING }
        } else if loads.never_within(&at_middle, wander, 1.0, most_n) {
            NOTHING
        } else if key == Key::Friction && !self.curved {
            let from = -bound.merit;
            let holding = loads.factor_needed(&at_middle, from).unwrap_or(from);
            Bound { merit: -(holding - FACTOR_HAIR * (1.0 + holding)).max(from), ..bound }
        } else {
            bound
        };
        self.loads = Some(loads);
        bound
    }

    /// Contacts in the middle of a box, straight edges covered all along.
    fn at_middle(&self, spans: &[Span]) -> Contacts {
        let mut middles = [[0.0; 2]; FingerCount::MOST];
        for ((middle, rail), span) in middles.iter_mut().zip(self.rails()).zip(spans) {
            let at = super::rail::middle(*span);
            *middle = if rail.bend > 0.0 { [at; 2] } else { *span };
        }
        contacts_over(self.rails(), &middles[..self.k], |rail| rail.mu).unwrap_or_else(Contacts::none)
    }

    /// What no placement exceeds where nothing is known of its contacts.
    fn most(&self, room_mm: f64) -> f64 {
        let longest = self.rails().iter().map(|rail| rail.mu.hypot(1.0)).fold(1.0, f64::max);
        match self.setting.goal.key {
            Key::Quality => longest,
            Key::QualityPerFinger => self.k as f64 * longest,
            Key::Placement => room_mm,
            Key::Friction | Key::Squeeze | Key::LoadMargin => 0.0,
        }
    }

    /// Largest room in a box, mm, and the finger that has least.
    fn room_mm(&self, spans: &[Span]) -> (f64, usize) {
        let rooms = self.rails().iter().zip(spans).map(|(rail, span)| rail.room_mm(*span));
        rooms.enumerate().fold((f64::INFINITY, 0), |least, (i, room)| if room < least.0 { (room, i) } else { least })
    }

    fn torque_mm(&self, score: &PlanarScore) -> f64 {
        (score.torque_up.min(score.torque_down) + PLACEMENT_HAIR) * self.setting.scene.frame().scale_mm
    }

    fn per_finger(&self, contacts: &Contacts, score: &PlanarScore, spans: &[Span], level: f64) -> Bound {
        let most = self.k as f64 * score.signed_quality;
        if most <= level {
            return Bound { merit: most, cut: widest(spans) };
        }
        let (least, _) = quality::per_finger_of(contacts.levers(), contacts.mus());
        Bound { merit: (least * contacts.longest()).min(most), cut: widest(spans) }
    }

    /// Placement tolerance of the placements in a box as far as closure limits it, mm: two bounds of it, equal but for the
    /// bracket where a finger stands on an arc. The lower one counts for a single placement, the upper for a box. `straight_mm`
    /// is what it would be on straight edges, or any other upper bound.
    fn placement(&self, spans: &[Span], straight_mm: f64, level: f64) -> (f64, f64) {
        if !self.curved {
            return (straight_mm, straight_mm);
        }
        let scale_mm = self.setting.scene.frame().scale_mm;
        // The guarantee on arcs ([`crate::mechanics::placement`]) with the contacts of the whole box: an offset is kept
        // as long as what is left of the friction gives more torque than the turned contacts change.
        let spare_at = |offset_mm: f64| {
            let mut change = offset_mm;
            let left_on = |rail: &Rail<'_>| (rail.mu.atan() - offset_mm * rail.bend).tan();
            for rail in self.rails() {
                let turn = offset_mm * rail.bend;
                if rail.mu.atan() < turn {
                    return f64::NEG_INFINITY;
                }
                if turn > 0.0 {
                    change = change.max((turn.sin() + (1.0 - turn.cos()) * left_on(rail)) / rail.bend);
                }
            }
            let Some(score) = score_over(self.rails(), spans, left_on) else { return f64::INFINITY };
            score.torque_up.min(score.torque_down) - change / scale_mm
        };
        let point = spans.iter().all(|span| half_mm(*span) <= 0.0);
        let (mut low, mut high) = (0.0, straight_mm.max(0.0));
        if !point && level > 0.0 && level < high {
            if spare_at(level) <= 0.0 {
                return (0.0, level);
            }
            low = level;
        }
        if spare_at(high) > 0.0 {
            return (high, high);
        }
        for _ in 0..HALVINGS[usize::from(!point)] {
            let middle = low + (high - low) / 2.0;
            if spare_at(middle) > 0.0 { low = middle } else { high = middle }
        }
        (low, high)
    }

    /// Whether something in a box may close with all friction multiplied by a factor: no less than [`friction::closes`].
    fn may_close(&self, spans: &[Span], contacts: &Contacts, factor: f64) -> bool {
        if !self.curved {
            return friction::signed_quality_at(contacts.levers(), contacts.mus(), factor) > CLOSED;
        }
        score_over(self.rails(), spans, |rail| rail.mu * factor).is_none_or(|score| score.signed_quality > CLOSED)
    }

    /// A friction factor below which nothing in a box closes; infinite when nothing does with all the friction there is.
    fn least_factor(&self, spans: &[Span], contacts: &Contacts, level: f64) -> f64 {
        let to_beat = -level;
        if to_beat < 1.0 && !self.may_close(spans, contacts, to_beat) {
            return to_beat;
        }
        if self.may_close(spans, contacts, 0.0) {
            return 0.0;
        }
        let (mut low, mut high) = (0.0, to_beat.min(1.0));
        while high - low > self.setting.goal.fine_factor(low) {
            let middle = low + (high - low) / 2.0;
            if self.may_close(spans, contacts, middle) { high = middle } else { low = middle }
        }
        low
    }

    /// The exact merit of a placement; nothing when it is no grasp, or below a floor, or its merit is not above `beat`.
    pub(super) fn value(&mut self, at: &[f64], beat: f64) -> Option<f64> {
        if !self.spans || !self.setting.gaps.kept(self.rails(), at) {
            return None;
        }
        self.tally.scored += 1;
        let mut spans: Spans = [[0.0; 2]; FingerCount::MOST];
        for (span, &x) in spans.iter_mut().zip(at) {
            *span = [x, x];
        }
        let spans = &spans[..self.k];
        let goal = &self.setting.goal;
        let floors = &self.setting.scene.setup().floors;
        let contacts = contacts_over(self.rails(), spans, |rail| rail.mu)?;
        let score = match &self.polygon {
            Some((mu, polygon)) => {
                let score = polygon.score(&polygon.heights_of_levers(contacts.levers(), *mu));
                if score.certain { score } else { contacts.by_definition() }
            }
            None => contacts.by_definition(),
        };
        if !(score.signed_quality > MARGINAL) {
            return None;
        }
        self.tally.closed += 1;
        if !(score.signed_quality >= floors.quality) {
            return None;
        }
        let placement_mm = |gauge: &Self| {
            let straight_mm = score.torque_up.min(score.torque_down) * gauge.setting.scene.frame().scale_mm;
            gauge.placement(spans, straight_mm.max(0.0), f64::NEG_INFINITY).0.min(gauge.room_mm(spans).0)
        };
        if floors.placement_mm > 0.0 && placement_mm(self) < floors.placement_mm {
            return None;
        }
        let (levers, mus) = (contacts.levers(), contacts.mus());
        let merit = match goal.key {
            Key::Quality => score.signed_quality,
            Key::QualityPerFinger => quality::per_finger_of(levers, mus).0,
            Key::Placement => placement_mm(self),
            Key::Friction => {
                // One closure test tells whether it is worth the root.
                let to_beat = -beat;
                if to_beat < 1.0 && !(friction::signed_quality_at(levers, mus, to_beat) > CLOSED) {
                    return None;
                }
                let closing = friction::factor_needed(levers, mus)?;
                match &self.loads {
                    Some(loads) => -loads.factor_needed(&contacts, closing)?,
                    None => -closing,
                }
            }
            Key::Squeeze | Key::LoadMargin => match &self.loads {
                Some(loads) => -loads.squeeze_n(&contacts)? / loads.unit_n(goal.key),
                None => 0.0,
            },
        };
        if !(merit > beat) {
            return None;
        }
        let margin = floors.friction_margin;
        if margin > 1.0 {
            let factor = 1.0 / margin;
            if !friction::closes(levers, mus, factor, friction::signed_quality_at(levers, mus, factor)) {
                return None;
            }
        }
        if let Some(loads) = &self.loads {
            let held = (floors.load_margin <= 0.0 || loads.within(&contacts, 1.0, loads.most_n))
                && (margin <= 1.0 || floors.load_margin < 1.0 || loads.within(&contacts, 1.0 / margin, loads.limit_n));
            if !held {
                return None;
            }
        }
        Some(merit)
    }

    /// Placement tolerance of a grasp, what of it closure alone would allow, the least room of its fingers and that of all
    /// together, mm.
    pub(super) fn comfort(&self, at: &[f64]) -> [f64; 4] {
        let mut spans: Spans = [[0.0; 2]; FingerCount::MOST];
        for (span, &x) in spans.iter_mut().zip(at) {
            *span = [x, x];
        }
        let spans = &spans[..self.k];
        let Some(contacts) = contacts_over(self.rails(), spans, |rail| rail.mu) else { return [0.0; 4] };
        let score = self.planar(&contacts);
        let straight_mm = score.torque_up.min(score.torque_down) * self.setting.scene.frame().scale_mm;
        let (room_mm, _) = self.room_mm(spans);
        let closure_mm = self.placement(spans, straight_mm.max(0.0), f64::NEG_INFINITY).0;
        let all_mm = self.rails().iter().zip(spans).map(|(rail, span)| rail.room_mm(*span)).sum();
        [closure_mm.min(room_mm), closure_mm, room_mm, all_mm]
    }

    /// The goal of the search.
    pub(super) fn goal(&self) -> &Goal {
        &self.setting.goal
    }

    /// The gaps the fingers keep.
    pub(super) fn gaps(&self) -> &Gaps<'a> {
        &self.setting.gaps
    }

    /// Torque scale, mm.
    pub(super) fn scale_mm(&self) -> f64 {
        self.setting.scene.frame().scale_mm
    }
}

/// What the swing of a finger counts that does not touch the weakest facet.
const BESIDE: f64 = 0.3;
/// What the length of an interval counts beside its swing.
const FLAT: f64 = 0.1;

/// The longest of some intervals.
pub(super) fn widest(spans: &[Span]) -> usize {
    let mut best = (f64::NEG_INFINITY, 0);
    for (i, span) in spans.iter().enumerate() {
        if half_mm(*span) > best.0 {
            best = (half_mm(*span), i);
        }
    }
    best.1
}

/// Largest `u . w` over a contact's generators.
pub(super) fn farthest(lever: &Lever, mu: f64, u: &Vector3<f64>) -> f64 {
    let (n, t) = (&lever.normal, &lever.tangent);
    let normal = u.x * n.x + u.y * n.y + u.z * lever.normal_torque;
    let along = u.x * t.x + u.y * t.y + u.z * lever.tangent_torque;
    normal + mu * along.abs() + lever.spread * u.z.abs()
}
