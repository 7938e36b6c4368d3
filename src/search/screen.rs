//! Screening: the kernel run over the candidate sets of a family, keeping what may be listed.
//!
//! On straight edges all members of a family press in the same directions, so the force polygon is built once for the
//! family and only the torques change from member to member; with a finger on an arc it is built for each. What prunes
//! what:
//! - forces that do not positively span the plane: no member closes, and no torque is looked at;
//! - ties on the key (plateaus are common) are settled by closure tests at the incumbent's friction needed, one kernel
//!   call each; the root finder runs only for a candidate that takes the lead.
//!
//! With load cases a family is gone through twice. First in the plane, where it is cheap: loads only take candidates away
//! and only raise the friction needed, so the first best is a bound. Only where that bound would enter the list are the
//! family's closed members put under the loads ([`LoadCheck`]), best first, until one holds.

use super::families::Family;
use super::family_forces::{FamilyForces, NO_LEVER, polygon_of};
use super::load_check::LoadCheck;
use super::order::{self, Candidate, FRICTION_QUANTUM, Key, SiteSet};
use super::plan::TRIES;
use super::rank::{Cancel, Cancelled, Listing};
use super::scene::Scene;
use super::sites::{Site, Sites};
use super::tally::Tally;
use crate::hand::{self, FingerCount, Tip};
use crate::mechanics::force_polygon::{ForcePolygon, PlanarScore};
use crate::mechanics::friction::UnitForces;
use crate::mechanics::placement::OnArcs;
use crate::mechanics::wrench::{MOST_DIRECTIONS, MOST_GENERATORS};
use crate::mechanics::{Lever, MARGINAL, friction, quality};
use nalgebra::Vector3;
use std::cmp::Ordering;
use std::hash::{DefaultHasher, Hash, Hasher};
use std::ops::Range;

/// What a ranking is asked for; the same for all families.
pub(super) struct Screen<'a> {
    pub scene: &'a Scene,
    pub sites: &'a Sites,
    pub key: Key,
    pub listing: Listing,
    pub cancel: &'a Cancel,
    /// Least distance between the axes of two pins, squared, mm2; 0 when any distance will do.
    least_apart_square: f64,
    scale_mm: f64,
}

/// Friction factor of a grasp that no friction makes hold its loads: behind all others.
const NO_FRICTION_HOLDS: f64 = 1e9;
/// Quanta of a placement on arcs that nobody has asked for yet.
const UNKNOWN: i64 = i64::MIN;
/// Sets looked at between two questions whether to stop.
const BETWEEN_CANCEL: u64 = 4096;

impl<'a> Screen<'a> {
    pub(super) fn new(scene: &'a Scene, sites: &'a Sites, key: Key, listing: Listing, cancel: &'a Cancel) -> Self {
        let hand = &scene.setup().hand;
        // Touching is allowed up to rounding of the positions themselves, as in `hand::apart`.
        let least = (2.0 * hand.pin_radius_mm + hand.gap_mm) * (1.0 - 1e-12);
        Self { scene, sites, key, listing, cancel, least_apart_square: least * least, scale_mm: scene.frame().scale_mm }
    }

    fn apart(&self, a: u32, b: u32) -> bool {
        let (a, b) = (self.sites.get(a), self.sites.get(b));
        let hand = &self.scene.setup().hand;
        match hand.tip {
            Tip::Pin => (a.centre - b.centre).norm_squared() >= self.least_apart_square,
            Tip::Pad => hand::apart(hand, (a.point, a.lever.normal), (b.point, b.lever.normal)),
        }
    }

    /// True when fingers may stand as near to one another as they like.
    fn any_distance(&self) -> bool {
        self.scene.setup().hand.tip == Tip::Pin && self.least_apart_square <= 0.0
    }

    /// The loads as a family meets them: all its members press on the same edges, which may limit the squeeze.
    fn load_check(&self, family: &Family) -> Option<LoadCheck<'a>> {
        let on = |&stretch: &u32| {
            let first = self.sites.get(self.sites.on(stretch as usize).start as u32);
            (self.scene.places()[first.stretch as usize].span.edge, first.lever.spread > 0.0)
        };
        let limit = self.scene.limit_on(family.stretches().iter().map(on));
        LoadCheck::new(self.scene, limit.map_or(f64::INFINITY, |limit| limit.squeeze_n))
    }

    /// True when all fingers of a set keep the hand's gap.
    pub(super) fn keeps_gaps(&self, set: &[u32]) -> bool {
        set.iter().enumerate().all(|(i, &a)| set[i + 1..].iter().all(|&b| self.apart(a, b)))
    }

    /// True when the family's forces positively span the plane, so that members may close.
    pub(super) fn may_close(&self, family: &Family) -> bool {
        FamilyForces::new(self.sites, family).may_close()
    }

    /// Screens every candidate set of a family whose first finger stands on one of these sites.
    pub(super) fn every(&self, family: &Family, first: Range<usize>, tally: &mut Tally) -> Result<(), Cancelled> {
        let whole = self.sites.on(family.stretches()[0] as usize) == first;
        let mut run = Run::new(self, family, tally);
        if !run.forces.may_close() && self.any_distance() && whole {
            run.tally.examined += u64::try_from(family.count(self.sites)).unwrap_or(u64::MAX);
            return Ok(());
        }
        run.every_set(0, first)?;
        run.finish(whole);
        Ok(())
    }

    /// Screens candidate sets of a family, one from each of these strata of its numbering, cut into `of` equal ones.
    pub(super) fn sample(
        &self,
        family: &Family,
        strata: Range<u64>,
        of: u64,
        uniform: &mut dyn FnMut() -> f64,
        tally: &mut Tally,
    ) -> Result<(), Cancelled> {
        let count = family.count(self.sites);
        let whole = strata == (0..of);
        let mut run = Run::new(self, family, tally);
        let stride = count as f64 / of as f64;
        for stratum in strata {
            for _ in 0..TRIES {
                let number = if u128::from(of) == count {
                    u128::from(stratum)
                } else {
                    ((stratum as f64 + uniform()) * stride) as u128
                };
                run.set = family.nth(self.sites, number.min(count - 1));
                if self.keeps_gaps(&run.set[..run.k]) {
                    run.look()?;
                    break;
                }
            }
        }
        run.finish(whole);
        Ok(())
    }

    /// Screens so many pairs of parallel jaws on a run, evenly along it.
    pub(super) fn jaws(&self, family: &Family, take: usize, tally: &mut Tally) -> Result<(), Cancelled> {
        let mut run = Run::new(self, family, tally);
        let [first, second] = [0, 1].map(|finger| self.sites.on(family.stretches()[finger] as usize));
        for i in 0..take {
            // All of them, or else the middles of even pieces.
            let at = if take == first.len() { i } else { (2 * i + 1) * first.len() / (2 * take) };
            run.set[..2].copy_from_slice(&[(first.start + at) as u32, (second.start + at) as u32]);
            run.look()?;
        }
        run.finish(true);
        Ok(())
    }

    /// Screens one candidate set by itself.
    pub(super) fn one(&self, family: &Family, set: SiteSet, tally: &mut Tally) -> Result<(), Cancelled> {
        let mut run = Run::new(self, family, tally);
        run.set = set;
        if self.keeps_gaps(&set[..run.k]) {
            run.look()?;
        }
        run.finish(false);
        Ok(())
    }
}

/// The screening of one family.
pub(super) struct Run<'a, 'b> {
    pub(super) screen: &'a Screen<'a>,
    family: &'a Family,
    pub(super) k: usize,
    pub(super) forces: FamilyForces,
    /// Least friction margin asked for, and the polygon at the friction it leaves.
    margin_floor: Option<(f64, ForcePolygon)>,
    /// The last factor a closure test was made at, and its polygon.
    at_factor: Option<(f64, ForcePolygon)>,
    /// The candidate set being looked at.
    pub(super) set: SiteSet,
    best: Option<Candidate>,
    lead_is_settled: bool,
    /// Direction in which the family's best grasp is weakest under a limit on each finger.
    weak_per_finger: Option<Vector3<f64>>,
    looked: u64,
    /// The loads, where the setup has any.
    pub(super) loads: Option<LoadCheck<'a>>,
    /// With loads: the closed members above the floors, to be gone through again.
    pub(super) members: Vec<Candidate>,
    /// The loads count in the friction needed.
    pub(super) friction_under_load: bool,
    pub(super) tally: &'b mut Tally,
}

impl<'a, 'b> Run<'a, 'b> {
    fn new(screen: &'a Screen<'a>, family: &'a Family, tally: &'b mut Tally) -> Self {
        Self {
            screen,
            family,
            k: family.stretches().len(),
            forces: FamilyForces::new(screen.sites, family),
            margin_floor: None,
            at_factor: None,
            set: SiteSet::default(),
            best: None,
            lead_is_settled: false,
            weak_per_finger: None,
            looked: 0,
            loads: screen.load_check(family),
            members: Vec::new(),
            friction_under_load: false,
            tally,
        }
    }

    /// Hands in the family's best grasp; `whole` when no other parcel has sets of this family.
    fn finish(mut self, whole: bool) {
        let Some(mut best) = self.best else { return };
        if whole {
            self.tally.families += 1;
        } else {
            let mut hasher = DefaultHasher::new();
            self.family.hash(&mut hasher);
            self.tally.spread.insert(hasher.finish());
        }
        // By squeeze nothing is known yet that could be compared.
        let to_compare = (self.loads.is_some() || !self.lead_is_settled) && !self.screen.key.is_by_squeeze();
        if to_compare {
            self.set = best.sites;
            if let Some(worst) = self.tally.top.worst().copied()
                && !self.comes_before(&mut best, &worst)
            {
                return;
            }
        }
        if self.loads.is_some() {
            let Some(held) = self.best_under_load(best) else { return };
            best = held;
        } else if !self.lead_is_settled {
            self.settle(&mut best);
        }
        self.tally.top.offer(best, self.family.group());
    }

    fn site(&self, finger: usize) -> &'a Site {
        self.screen.sites.get(self.set[finger])
    }

    /// Walks all sets with finger `finger` on these sites of its stretch and the later fingers anywhere after it.
    fn every_set(&mut self, finger: usize, on: Range<usize>) -> Result<(), Cancelled> {
        let next = self.family.stretches().get(finger + 1).copied();
        let same = next == Some(self.family.stretches()[finger]);
        for site in on {
            self.set[finger] = site as u32;
            if !self.screen.any_distance() && !(0..finger).all(|other| self.screen.apart(self.set[other], site as u32))
            {
                continue;
            }
            match next {
                None => self.look()?,
                Some(stretch) => {
                    let range = self.screen.sites.on(stretch as usize);
                    let from = if same { site + 1 } else { range.start };
                    self.every_set(finger + 1, from..range.end)?;
                }
            }
        }
        Ok(())
    }

    /// Looks at the current set.
    fn look(&mut self) -> Result<(), Cancelled> {
        self.looked += 1;
        if self.looked.is_multiple_of(BETWEEN_CANCEL) && self.screen.cancel.is_cancelled() {
            return Err(Cancelled);
        }
        self.tally.examined += 1;
        let Some(score) = self.closed_score() else { return Ok(()) };
        self.tally.closed += 1;
        let floors = &self.screen.scene.setup().floors;
        let room_mm = self.room_mm();
        let straight_mm = score.torque_up.min(score.torque_down) * self.screen.scale_mm;
        let placement_mm = straight_mm.min(room_mm);
        if score.signed_quality < floors.quality
            || placement_mm < floors.placement_mm
            || (floors.placement_mm > 0.0 && !self.keeps_placement(floors.placement_mm))
            || !self.keeps_margin_floor()
        {
            self.tally.below_floors += 1;
            return Ok(());
        }
        let room = order::quanta(room_mm / self.screen.scale_mm);
        let Some(mut key) = self.key(&score, order::quanta(placement_mm / self.screen.scale_mm)) else {
            return Ok(());
        };
        let mut placement = order::quanta(placement_mm / self.screen.scale_mm);
        if self.forces.curved {
            // So far the placement is that on straight edges, an upper bound. The guarantee on arcs costs more: it is
            // worked out for ties, and by placement only for who passes one question at the tolerance in front.
            placement = UNKNOWN;
            if self.screen.key == Key::Placement {
                let front = self.front();
                if let Some(front) = front
                    && (key < front.key || !self.keeps_placement(order::below(front.key) * self.screen.scale_mm))
                {
                    return Ok(());
                }
                placement = self.placement_on_arcs(straight_mm, room_mm);
                key = placement;
            }
        }
        let mut candidate = Candidate { key, friction: 0, placement, room, sites: self.set };
        match self.screen.listing {
            Listing::Families => {
                if self.loads.is_some() {
                    self.members.push(candidate);
                }
                // By squeeze the second round alone decides.
                let decided_later = self.screen.key.is_by_squeeze() && self.best.is_some();
                if !decided_later && self.takes_lead(&mut candidate) {
                    self.best = Some(candidate);
                }
            }
            Listing::Members => {
                let worst = self.tally.top.worst().copied();
                self.friction_under_load = false;
                let in_question = match worst {
                    Some(worst) if !self.screen.key.is_by_squeeze() => self.comes_before(&mut candidate, &worst),
                    _ => true,
                };
                self.friction_under_load = self.screen.key == Key::Friction;
                if in_question {
                    match self.key_under_load(None) {
                        None => return Ok(()),
                        Some(None) => {}
                        Some(Some(key)) => candidate.key = key,
                    }
                }
                if in_question && (self.loads.is_none() || self.stands(&mut candidate, worst.as_ref())) {
                    self.settle(&mut candidate);
                    self.tally.top.offer(candidate, candidate.sites);
                }
            }
        }
        Ok(())
    }

    /// What a candidate has to beat to be of interest; nothing where all members are wanted, to be put under the loads.
    fn front(&self) -> Option<Candidate> {
        match self.screen.listing {
            Listing::Families if self.loads.is_some() => None,
            Listing::Families => self.best,
            Listing::Members => self.tally.top.worst().copied(),
        }
    }

    /// Calls `ask` with the current contacts as the guarantee on arcs sees them.
    fn on_arcs<T>(&self, ask: impl FnOnce(OnArcs) -> T) -> T {
        ask(OnArcs {
            levers: &self.levers()[..self.k],
            mus: &self.forces.mus[..self.k],
            curvatures: &self.forces.curvatures[..self.k],
            scale_mm: self.screen.scale_mm,
        })
    }

    /// Whether a placement below the straight one is kept on arcs too.
    fn keeps_placement(&self, offset_mm: f64) -> bool {
        !self.forces.curved || self.on_arcs(|on_arcs| on_arcs.spare_at(offset_mm)) > 0.0
    }

    /// Quanta of the key, or nothing when the current set is already known to be no better than the family's best.
    fn key(&mut self, score: &PlanarScore, placement: i64) -> Option<i64> {
        Some(match self.screen.key {
            Key::Quality => order::quanta(score.signed_quality),
            Key::Placement => placement,
            Key::QualityPerFinger => order::quanta(self.per_finger()?),
            // Decided with the friction tie-break, or under load.
            Key::Friction | Key::Squeeze | Key::LoadMargin => 0,
        })
    }

    /// Quanta of the guarantee on arcs for the current set.
    fn placement_on_arcs(&self, straight_mm: f64, room_mm: f64) -> i64 {
        let mm = self.on_arcs(|on_arcs| on_arcs.tolerance_mm(straight_mm)).min(room_mm);
        order::quanta(mm / self.screen.scale_mm)
    }

    /// Finds what the tie-breaks ask of a candidate and is not known yet.
    pub(super) fn settle(&mut self, candidate: &mut Candidate) {
        candidate.friction = self.friction_quanta(&candidate.sites);
        self.settle_placement(candidate);
    }

    fn settle_placement(&mut self, candidate: &mut Candidate) {
        if candidate.placement == UNKNOWN {
            let current = std::mem::replace(&mut self.set, candidate.sites);
            let score = self.closed_score();
            let straight_mm = score.map_or(0.0, |s| s.torque_up.min(s.torque_down)) * self.screen.scale_mm;
            candidate.placement = self.placement_on_arcs(straight_mm, self.room_mm());
            self.set = current;
        }
    }

    /// Distance of the current set's fingers to the ends of their stretches, the least, mm.
    fn room_mm(&self) -> f64 {
        (0..self.k).map(|finger| self.site(finger).room_mm).fold(f64::INFINITY, f64::min)
    }

    /// Whether the current set becomes the family's best. What the tie-breaks ask of a leader is found only once someone
    /// ties with it: while quality rises along an edge the lead changes at every step.
    fn takes_lead(&mut self, candidate: &mut Candidate) -> bool {
        self.lead_is_settled &= match self.best {
            None => false,
            Some(best) => best.key >= candidate.key,
        };
        let Some(mut best) = self.best else { return true };
        match best.key.cmp(&candidate.key) {
            Ordering::Less => return true,
            Ordering::Greater => return false,
            Ordering::Equal => {}
        }
        if !self.lead_is_settled {
            self.settle(&mut best);
            self.best = Some(best);
            self.lead_is_settled = true;
        }
        let takes = self.comes_before(candidate, &best);
        if takes && candidate.friction != best.friction {
            self.settle(candidate);
        }
        takes
    }

    /// Score of the current set when it is closed. Where contacts differ in mu the polygon of unit forces filters, and
    /// the plain definition scores.
    fn closed_score(&self) -> Option<PlanarScore> {
        if !self.forces.may_close() {
            return None;
        }
        let mut torques = [[0.0; 2]; MOST_DIRECTIONS];
        for (finger, pair) in torques.chunks_exact_mut(2).take(self.k).enumerate() {
            pair.copy_from_slice(&self.site(finger).torques);
        }
        let own;
        let polygon = if self.forces.curved {
            own = polygon_of(self.forces.mu, &self.levers()[..self.k], &self.forces.mus[..self.k]);
            if !self.forces.spans(&own) {
                return None;
            }
            &own
        } else {
            &self.forces.polygon
        };
        let score = match self.forces.mu {
            Some(_) => {
                let score = polygon.score(&polygon.heights(&torques[..2 * self.k]));
                if score.certain { score } else { self.by_definition() }
            }
            None => {
                for (finger, pair) in torques.chunks_exact_mut(2).take(self.k).enumerate() {
                    let mu = self.forces.mus[finger];
                    let length = (1.0 + mu * mu).sqrt();
                    pair.as_flattened_mut().iter_mut().for_each(|torque| *torque /= length);
                }
                // Unit forces are the shorter ones: what closes has at least this quality with the longer.
                let score = polygon.score(&polygon.heights(&torques[..2 * self.k]));
                if score.certain && score.signed_quality <= 0.0 {
                    return None;
                }
                self.by_definition()
            }
        };
        (score.signed_quality > MARGINAL).then_some(score)
    }

    fn by_definition(&self) -> PlanarScore {
        let mut generators = [Vector3::zeros(); MOST_GENERATORS];
        let mut n = 0;
        for finger in 0..self.k {
            let own = self.site(finger).lever.generators(self.forces.mus[finger]);
            generators[n..n + own.len()].copy_from_slice(&own);
            n += own.len();
        }
        quality::by_definition(&generators[..n])
    }

    /// Whether the current set comes before a candidate whose friction is known. Its own friction is set when equal.
    pub(super) fn comes_before(&mut self, candidate: &mut Candidate, other: &Candidate) -> bool {
        match other.key.cmp(&candidate.key) {
            Ordering::Less => {}
            Ordering::Greater => return false,
            Ordering::Equal => {
                // Less friction, as much, or more: by tests half a quantum to either side.
                let half = FRICTION_QUANTUM / 2.0;
                let at = other.friction as f64 * FRICTION_QUANTUM;
                if !(other.friction > 0 && self.closes_at(at - half) && self.holds_at(at - half)) {
                    if !self.closes_at(at + half) {
                        return false;
                    }
                    // At best a tie, which the rest decides. On plateaus most candidates end here, before the loads are
                    // asked once more.
                    self.settle_placement(candidate);
                    candidate.friction = other.friction;
                    return *candidate < *other && self.holds_at(at + half);
                }
            }
        }
        candidate.friction = i64::MIN;
        true
    }

    /// Friction needed by a set of this family, in quanta; where friction is the key, under load the larger of that for
    /// closure and that for holding. Ties on other keys are settled by that for closure alone, which costs a hundredth.
    fn friction_quanta(&self, set: &SiteSet) -> i64 {
        let levers = set.map(|site| self.screen.sites.get(site).lever);
        let (levers, mus) = (&levers[..self.k], &self.forces.mus[..self.k]);
        let closing = friction::factor_needed(levers, mus).unwrap_or(0.0);
        let needed = match &self.loads {
            Some(loads) if self.friction_under_load => {
                loads.factor_needed(levers, mus, closing).unwrap_or(NO_FRICTION_HOLDS)
            }
            _ => closing,
        };
        order::friction_quanta(needed)
    }

    pub(super) fn levers(&self) -> [Lever; FingerCount::MOST] {
        let mut levers = [NO_LEVER; FingerCount::MOST];
        for (finger, lever) in levers[..self.k].iter_mut().enumerate() {
            *lever = self.site(finger).lever;
        }
        levers
    }

    /// Whether the current set closes with all friction multiplied by a factor.
    fn closes_at(&mut self, factor: f64) -> bool {
        let polygon = match self.at_factor {
            #[expect(clippy::float_cmp, reason = "a cache: only the very same factor will do")]
            Some((cached, polygon)) if cached == factor && !self.forces.curved => polygon,
            _ => {
                let polygon = self.unit_polygon(factor);
                self.at_factor = Some((factor, polygon));
                polygon
            }
        };
        self.closes_on(&polygon, factor)
    }

    fn unit_polygon(&self, factor: f64) -> ForcePolygon {
        ForcePolygon::new(UnitForces::new(&self.levers()[..self.k], &self.forces.mus[..self.k], factor).forces())
    }

    fn closes_on(&self, polygon: &ForcePolygon, factor: f64) -> bool {
        let (levers, mus) = (&self.levers()[..self.k], &self.forces.mus[..self.k]);
        let score = polygon.score(&polygon.heights(UnitForces::new(levers, mus, factor).torques()));
        if score.certain && score.signed_quality > MARGINAL {
            return true;
        }
        let quality =
            if score.certain { score.signed_quality } else { friction::signed_quality_at(levers, mus, factor) };
        friction::closes(levers, mus, factor, quality)
    }

    fn keeps_margin_floor(&mut self) -> bool {
        let floor = self.screen.scene.setup().floors.friction_margin;
        if floor <= 1.0 {
            return true;
        }
        let polygon = match self.margin_floor {
            Some((_, polygon)) if !self.forces.curved => polygon,
            _ => {
                let polygon = self.unit_polygon(1.0 / floor);
                self.margin_floor = Some((floor, polygon));
                polygon
            }
        };
        self.closes_on(&polygon, 1.0 / floor)
    }

    /// Quality with each finger limited, or nothing when a direction already tried shows that the family's best is better.
    fn per_finger(&mut self) -> Option<f64> {
        let levers = self.levers();
        let (levers, mus) = (&levers[..self.k], &self.forces.mus[..self.k]);
        if let (Some(least), Some(u)) = (self.front(), self.weak_per_finger)
            && order::quanta(quality::reach_per_finger(levers, mus, &u)) < least.key
        {
            return None;
        }
        let (value, direction) = quality::per_finger_of(levers, mus);
        self.weak_per_finger = Some(direction);
        Some(value)
    }
}
