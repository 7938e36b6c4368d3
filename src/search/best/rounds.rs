//! The rounds of a search: which families are looked at when, against which level, and what is known of them in the end.

use super::super::families::Family;
use super::super::order::{Key, friction_quanta, quanta};
use super::super::rank::{Cancel, Cancelled, Listed};
use super::super::scene::Spot;
use super::cover::{Cover, Screened};
use super::gauge::{Bound, Spots};
use super::plot::{Aim, Lead, Plot, State};
use super::{Proved, ProvedGrasp, Proving, Setting, Tally, improve, start};
use crate::hand::Closing;
use crate::mechanics::Verdict;
use rayon::prelude::*;
use std::cmp::Reverse;
use std::collections::BTreeMap;

/// Families of one round: few at first, when the list still changes, more later.
const ROUND: [usize; 2] = [16, 512];
/// Boxes looked at in one family and one round.
const BOXES_A_ROUND: u64 = 128;
/// Families screened by directions for each box of the budget.
const SCREENED_A_BOX: u64 = 1000;
/// First looks that count as one box: most families show at once that they are behind.
const LOOKS_A_BOX: u64 = 8;
/// Progress is told so many times before a list goes with it: a short search needs none.
const FIRST_SNAPSHOT: u32 = 4;
/// Boxes the polishing of the first row may take: one for so many looked at before, and so many more.
const POLISH_SHARE: u64 = 3;
const POLISH_BOXES: u64 = 512;
/// Beginnings screened between two looks at the budget and at the wish to stop.
const BEGINNINGS: usize = 16;

/// The state of a search between two rounds.
pub(super) struct Search<'a> {
    setting: &'a Setting<'a>,
    want: usize,
    budget: u64,
    cancel: &'a Cancel,
    /// Rows of a list that is told on the way.
    snapshot_rows: usize,
    /// Times progress was told.
    told: u32,
    /// Families were left out because the budget ended.
    cut_short: bool,
    /// The budget ended before all was settled to the gap.
    pub(super) spent: bool,
    /// The best found of each family that may come into the list.
    leads: BTreeMap<Family, Lead>,
    /// Families looked at once that may hold better, with their bounds.
    waiting: Vec<(Bound, Family)>,
    /// Families that may hold better, with what is known of them.
    open: Vec<State>,
    /// Bounds of families that are settled and may be in the list.
    settled: BTreeMap<Family, f64>,
    /// The largest bound of all that was dropped without a name.
    dropped: f64,
    boxes: u64,
    families: u64,
    opened: u64,
    tally: Tally,
    /// Families that are settled but for boxes put aside.
    aside: Vec<State>,
    /// Families looked at that need not be opened, but may hold better than the first row.
    passed: Vec<(Bound, Family)>,
    polished: bool,
}

impl<'a> Search<'a> {
    pub(super) fn new(
        setting: &'a Setting<'a>,
        want: usize,
        budget: u64,
        cancel: &'a Cancel,
        snapshot_rows: usize,
    ) -> Self {
        Self {
            setting,
            want,
            budget,
            cancel,
            snapshot_rows,
            told: 0,
            cut_short: false,
            spent: false,
            leads: BTreeMap::new(),
            waiting: Vec::new(),
            open: Vec::new(),
            settled: BTreeMap::new(),
            dropped: f64::NEG_INFINITY,
            boxes: 0,
            families: 0,
            opened: 0,
            tally: Tally::default(),
            aside: Vec::new(),
            passed: Vec::new(),
            polished: false,
        }
    }

    fn stop(&self) -> Result<(), Cancelled> {
        if self.cancel.is_cancelled() { Err(Cancelled) } else { Ok(()) }
    }

    /// The merits found, best first.
    fn merits(&self) -> Vec<f64> {
        let mut merits: Vec<f64> = self.leads.values().map(|lead| lead.merit).collect();
        merits.sort_by(|a, b| b.total_cmp(a));
        merits
    }

    /// What a family has to beat to matter: the last of the list by more than the gap.
    fn level(&self) -> f64 {
        let merits = self.merits();
        self.setting.goal.enough(merits.get(self.want - 1).copied(), merits.first().copied())
    }

    /// Merit of the first row so far.
    fn first(&self) -> f64 {
        self.leads.values().map(|lead| lead.merit).fold(f64::NEG_INFINITY, f64::max)
    }

    /// What a family has to beat to matter, to the list or to its first row.
    fn least(&self) -> f64 {
        let first = self.first();
        if first.is_finite() { self.level().min(self.setting.goal.nearly(first)) } else { self.level() }
    }

    /// Good placements to begin with, so that most families never have to be opened.
    pub(super) fn start(&mut self, known: &[Vec<Spot>]) -> Result<(), Cancelled> {
        self.know(known)?;
        if self.setting.scene.setup().hand.closing == Closing::Free {
            let (leads, tally) = start::leads(self.setting, self.want.saturating_sub(self.leads.len()), self.cancel)?;
            self.tally.add(tally);
            for (family, lead) in leads {
                self.offer(family, lead);
            }
            self.forget();
        }
        Ok(())
    }

    /// Takes placements from elsewhere, as far as they are grasps here.
    pub(super) fn know(&mut self, known: &[Vec<Spot>]) -> Result<(), Cancelled> {
        for spots in known {
            self.stop()?;
            for (family, lead) in start::known(self.setting, spots) {
                self.offer(family, lead);
            }
        }
        self.forget();
        Ok(())
    }

    /// True when the budget ended before all was settled.
    pub(super) fn is_spent(&self) -> bool {
        let level = self.level();
        let is_open = |bound: f64| bound > level;
        self.cut_short
            || self.open.iter().any(|state| is_open(state.open_bound()))
            || self.waiting.iter().any(|(bound, _)| is_open(bound.merit))
    }

    /// Looks once at every family that its directions do not exclude.
    pub(super) fn first_looks(&mut self, observe: &(dyn Fn(Proving) + Sync)) -> Result<(), Cancelled> {
        let setting = self.setting;
        if setting.scene.setup().hand.closing == Closing::Parallel {
            let families: Vec<Family> =
                (0..setting.scene.jaw_runs().len() as u32).map(|run| Family::new(&[run])).collect();
            self.families = families.len() as u64;
            return self.look_at(&families, f64::NEG_INFINITY);
        }
        if start::never_closes(setting) {
            return Ok(());
        }
        let level = self.least();
        let cover = Cover::above(setting, level);
        let patience = self.budget.saturating_mul(SCREENED_A_BOX);
        let beginnings: Vec<u32> = setting.following(0, 0).map(|rail| rail as u32).collect();
        // What the directions exclude is not above the level.
        self.dropped = self.dropped.max(level);
        for group in beginnings.chunks(BEGINNINGS) {
            self.stop()?;
            let screened: Vec<Screened> = group
                .par_iter()
                .map(|&first| cover.beginning_with(first, setting.fingers, setting, patience))
                .collect();
            let stopped = self.families > patience || screened.iter().any(|own| own.stopped);
            self.families += screened.iter().map(|own| own.seen).sum::<u64>();
            let kept: Vec<Family> = screened.into_iter().flat_map(|own| own.kept).collect();
            self.look_at(&kept, level)?;
            observe(self.progress()?);
            if stopped || self.boxes >= self.budget {
                if group.last() != beginnings.last() || stopped {
                    self.cut_short();
                }
                break;
            }
        }
        Ok(())
    }

    /// The budget ended before every family was looked at.
    fn cut_short(&mut self) {
        self.cut_short = true;
        self.dropped = self.dropped.max(self.any());
    }

    /// What no family can beat.
    fn any(&self) -> f64 {
        let longest = self.setting.rails.iter().map(|rail| rail.mu.hypot(1.0)).fold(1.0, f64::max);
        match self.setting.goal.key {
            Key::Quality => longest,
            Key::QualityPerFinger => longest * self.setting.fingers as f64,
            Key::Placement => self.setting.rails.iter().map(|rail| rail.room_mm(rail.whole)).fold(0.0, f64::max),
            Key::Friction | Key::Squeeze | Key::LoadMargin => 0.0,
        }
    }

    /// Bounds families as a whole, as far as the budget goes.
    fn look_at(&mut self, families: &[Family], level: f64) -> Result<(), Cancelled> {
        let left = usize::try_from(self.left().saturating_mul(LOOKS_A_BOX)).unwrap_or(usize::MAX);
        let (now, never) = families.split_at(left.min(families.len()));
        if !never.is_empty() {
            self.cut_short();
        }
        let setting = self.setting;
        let look = |family: &Family| {
            if self.cancel.is_cancelled() {
                return None;
            }
            let mut plot = Plot::new(setting, family);
            let whole = plot.whole();
            Some(plot.bound(&whole, level))
        };
        let looks: Option<Vec<Bound>> = now.par_iter().map(look).collect();
        for (bound, family) in looks.ok_or(Cancelled)?.into_iter().zip(now) {
            if bound.merit > level {
                self.waiting.push((bound, *family));
            } else {
                self.dropped = self.dropped.max(bound.merit);
            }
        }
        self.boxes += (now.len() as u64).div_ceil(LOOKS_A_BOX);
        Ok(())
    }

    /// What is left of the budget.
    fn left(&self) -> u64 {
        self.budget.saturating_sub(self.boxes)
    }

    /// Cuts boxes, those of the families with the largest bounds first, until every family is settled or the budget spent.
    pub(super) fn settle(&mut self, observe: &(dyn Fn(Proving) + Sync)) -> Result<(), Cancelled> {
        // Largest bound last; families are all different, so the order is total.
        self.waiting.sort_by(|a, b| a.0.merit.total_cmp(&b.0.merit).then_with(|| b.1.cmp(&a.1)));
        let mut size = ROUND[0];
        while self.round(size)? {
            observe(self.progress()?);
            size = (2 * size).min(ROUND[1]);
        }
        Ok(())
    }

    /// One round; false when there was nothing to do, or nothing to do it with.
    fn round(&mut self, size: usize) -> Result<bool, Cancelled> {
        let level = self.level();
        if self.waiting.last().is_some_and(|(bound, _)| bound.merit <= level) {
            self.passed.append(&mut self.waiting);
        }
        let aim = Aim { level, first: self.first(), polish: false };
        let mut round = self.next(size, level);
        let most = BOXES_A_ROUND.min(self.left() / round.len().max(1) as u64);
        if round.is_empty() || most < 2 {
            self.open.append(&mut round);
            return Ok(false);
        }
        self.work(round, aim, most)?;
        Ok(true)
    }

    /// Cuts boxes of some families, and puts together what they came to.
    fn work(&mut self, round: Vec<State>, aim: Aim, most: u64) -> Result<(), Cancelled> {
        let (setting, cancel) = (self.setting, self.cancel);
        let work = |mut state: State| {
            if cancel.is_cancelled() {
                return None;
            }
            let mut plot = Plot::new(setting, &state.family);
            let boxes = plot.settle(&mut state, aim, most);
            Some((state, boxes, plot.gauge.tally))
        };
        let done: Option<Vec<(State, u64, Tally)>> = round.into_par_iter().map(work).collect();
        for (state, boxes, tally) in done.ok_or(Cancelled)? {
            self.boxes += boxes;
            self.tally.add(tally);
            if let Some(lead) = state.lead {
                self.offer(state.family, lead);
            }
            if state.is_settled() && state.has_more() {
                self.aside.push(state);
            } else if state.is_settled() {
                self.settled.insert(state.family, state.bound());
            } else {
                self.open.push(state);
            }
        }
        self.forget();
        Ok(())
    }

    /// Goes on where something better than the first row may be, as far as a share of the boxes looked at so far.
    pub(super) fn polish(&mut self, observe: &(dyn Fn(Proving) + Sync)) -> Result<(), Cancelled> {
        let first = self.first();
        if !first.is_finite() || self.is_spent() {
            self.waiting.append(&mut self.passed);
            self.polished = !first.is_finite() && self.highest() <= self.setting.goal.enough(None, None);
            return Ok(());
        }
        if let Some((&family, &lead)) = self.leads.iter().find(|(_, lead)| lead.merit >= first) {
            let mut plot = Plot::new(self.setting, &family);
            let better = improve::to_the_middle(&mut plot, lead, true);
            self.tally.add(plot.gauge.tally);
            self.offer(family, better);
        }
        let first = self.first();
        let extra = self.boxes / POLISH_SHARE + POLISH_BOXES;
        let budget = self.budget;
        self.budget = budget.min(self.boxes + extra);
        let passed = std::mem::take(&mut self.passed);
        let (more, over): (Vec<_>, Vec<_>) = passed.into_iter().partition(|(bound, _)| bound.merit > first);
        self.dropped = over.iter().map(|(bound, _)| bound.merit).fold(self.dropped, f64::max);
        self.waiting = more;
        self.waiting.sort_by(|a, b| a.0.merit.total_cmp(&b.0.merit).then_with(|| b.1.cmp(&a.1)));
        loop {
            for mut state in std::mem::take(&mut self.aside) {
                state.take_up();
                self.open.push(state);
            }
            let first = self.first();
            let level = self.setting.goal.nearly(first);
            let is_over = |bound: f64| bound <= level;
            let waits = self.waiting.last().is_some_and(|(bound, _)| !is_over(bound.merit));
            let opens = self.open.iter().any(|state| !is_over(state.open_bound()));
            if !waits && !opens {
                self.polished = self.highest() <= level;
                break;
            }
            let now = self.next(ROUND[0], level);
            let most = BOXES_A_ROUND.min(self.left() / now.len().max(1) as u64);
            if most < 2 {
                self.open.extend(now);
                break;
            }
            self.work(now, Aim { level, first: level, polish: true }, most)?;
            observe(self.progress()?);
        }
        self.budget = budget;
        Ok(())
    }

    /// The families with the largest bounds above a level, at most so many.
    fn next(&mut self, size: usize, level: f64) -> Vec<State> {
        self.open.sort_by(|a, b| a.open_bound().total_cmp(&b.open_bound()).then_with(|| b.family.cmp(&a.family)));
        let mut round = Vec::with_capacity(size);
        while round.len() < size {
            let waits = self.waiting.last().map_or(f64::NEG_INFINITY, |(bound, _)| bound.merit);
            let opens = self.open.last().map_or(f64::NEG_INFINITY, State::open_bound);
            if !(opens.max(waits) > level) {
                break;
            }
            if opens >= waits {
                round.extend(self.open.pop());
            } else if let Some((bound, family)) = self.waiting.pop() {
                self.opened += 1;
                round.push(State::new(family, bound, self.leads.get(&family).copied()));
            } else {
                break;
            }
        }
        round
    }

    /// Keeps a placement, if it is the best of its family.
    fn offer(&mut self, family: Family, lead: Lead) {
        let own = self.leads.entry(family).or_insert(lead);
        if lead.merit > own.merit {
            *own = lead;
        }
    }

    /// Forgets families too far behind to come into the list, but for their bounds.
    fn forget(&mut self) {
        let Some(&last) = self.merits().get(self.want - 1) else { return };
        self.leads.retain(|_, lead| lead.merit >= last);
        let (leads, dropped) = (&self.leads, &mut self.dropped);
        self.settled.retain(|family, bound| {
            let listed = leads.contains_key(family);
            *dropped = if listed { *dropped } else { dropped.max(*bound) };
            listed
        });
    }

    /// The largest of all bounds and merits.
    fn highest(&self) -> f64 {
        let waiting = self.waiting.iter().map(|(bound, _)| bound.merit);
        let open = self.open.iter().chain(&self.aside).map(State::bound);
        let waiting = waiting.chain(self.passed.iter().map(|(bound, _)| bound.merit));
        let bounds = waiting.chain(open).chain(self.settled.values().copied());
        bounds.fold(self.dropped.max(self.first()), f64::max).min(self.any())
    }

    fn progress(&mut self) -> Result<Proving, Cancelled> {
        let best = self.merits().first().copied();
        let bound = self.highest();
        let told = |merit| self.setting.goal.told(merit);
        let gap = best.map(|best| self.setting.goal.gap_between(best, bound, best)).filter(|gap| gap.is_finite());
        let (best, bound) = (best.map(told), bound.is_finite().then(|| told(bound)));
        self.told += 1;
        let due = self.snapshot_rows > 0 && self.told >= FIRST_SNAPSHOT && self.told.is_power_of_two();
        let grasps = if due { Some(self.list_so_far()?) } else { None };
        Ok(Proving { boxes: self.boxes, budget: self.budget, best, bound, gap, grasps })
    }

    /// The list, best first; of families that are equal on the key those with the larger placement tolerance and room.
    fn in_order(&self) -> Vec<(Family, Lead)> {
        let comforts = |(family, lead): (&Family, &Lead)| {
            let plot = Plot::new(self.setting, family);
            let spots = plot.spots(&lead.at);
            let comfort = plot.gauge.comfort(&spots[..plot.gauge.k]).map(quanta);
            ((self.setting.goal.quanta(lead.merit), comfort), *family, *lead)
        };
        let mut list: Vec<_> = self.leads.iter().map(comforts).collect();
        list.sort_by(|a, b| b.0.cmp(&a.0).then_with(|| a.1.cmp(&b.1)));
        list.truncate(self.want);
        list.into_iter().map(|(_, family, lead)| (family, lead)).collect()
    }

    /// The best so far, confirmed.
    fn list_so_far(&self) -> Result<Vec<Listed>, Cancelled> {
        let mut list = self.in_order();
        list.truncate(self.snapshot_rows);
        let (setting, cancel) = (self.setting, self.cancel);
        let row = |(family, lead): &(Family, Lead)| {
            (!cancel.is_cancelled()).then(|| listed(setting, &Plot::new(setting, family), &lead.at))
        };
        let rows: Option<Vec<Option<Listed>>> = list.par_iter().map(row).collect();
        Ok(rows.ok_or(Cancelled)?.into_iter().flatten().collect())
    }

    /// The list, moved to the middles of plateaus and confirmed, and what is proved of it.
    pub(super) fn finish(mut self) -> Result<Proved, Cancelled> {
        let mut bounds = std::mem::take(&mut self.settled);
        let states = self.open.drain(..).chain(self.aside.drain(..));
        bounds.extend(states.map(|state| (state.family, state.bound())));
        bounds.extend(self.waiting.drain(..).map(|(bound, family)| (family, bound.merit)));
        let list = self.in_order();
        let full = list.len() == self.want;
        // A family without a bound of its own is among those dropped.
        let own = |(family, lead): (Family, Lead)| {
            let bound = bounds.remove(&family).unwrap_or(self.dropped).min(self.any());
            (family, lead, bound)
        };
        let list: Vec<(Family, Lead, f64)> = list.into_iter().map(own).collect();
        let mut rest = bounds.into_values().fold(self.dropped, f64::max).min(self.any());
        let (setting, cancel) = (self.setting, self.cancel);
        let row = |(place, (family, lead, bound)): (usize, &(Family, Lead, f64))| {
            (!cancel.is_cancelled()).then(|| {
                let (row, tally) = row(setting, family, *lead, *bound, place == 0);
                (row.ok_or(*bound), tally)
            })
        };
        let rows: Option<Vec<(Result<Row, f64>, Tally)>> = list.par_iter().enumerate().map(row).collect();
        let mut inconclusive = 0;
        let mut listed = Vec::with_capacity(list.len());
        for (row, tally) in rows.ok_or(Cancelled)? {
            self.tally.add(tally);
            match row {
                Ok(row) => listed.push(row),
                Err(bound) => {
                    inconclusive += 1;
                    rest = rest.max(bound);
                }
            }
        }
        Ok(self.proved(listed, rest, full, inconclusive))
    }

    fn proved(&self, mut rows: Vec<Row>, rest: f64, full: bool, inconclusive: u64) -> Proved {
        let goal = &self.setting.goal;
        // The tie-breaks of every list of grasps.
        rows.sort_by_cached_key(|row| {
            let a = &row.listed.assessment;
            let room_mm = row.listed.grasp.rooms_mm.iter().copied().fold(f64::INFINITY, f64::min);
            let friction = friction_quanta(a.friction_needed.unwrap_or(0.0));
            (Reverse(goal.quanta(row.merit)), friction, Reverse(quanta(a.placement.mm)), Reverse(quanta(room_mm)))
        });
        let best_bound = rows.iter().map(|row| row.bound).fold(rest, f64::max);
        let best = rows.iter().map(|row| row.merit).fold(f64::NEG_INFINITY, f64::max);
        let own = rows.iter().map(|row| goal.gap_between(row.merit, row.bound, best));
        let first = rows.first().map(|row| goal.gap_between(row.merit, best_bound, best));
        // Where nothing is listed, nothing may be there to be listed.
        let best_gap = first.unwrap_or(if rest <= goal.enough(None, None) { 0.0 } else { f64::INFINITY });
        let behind = match rows.last() {
            Some(last) if full => goal.gap_between(last.merit, rest, best),
            // Every family there is should be in the list.
            _ if rest <= goal.enough(None, Some(best).filter(|best| best.is_finite())) => 0.0,
            _ => f64::INFINITY,
        };
        let gap = own.chain(first).fold(behind, f64::max);
        let told = |merit: f64| (merit > f64::NEG_INFINITY).then(|| goal.told(merit));
        let grasp =
            |row: Row| ProvedGrasp { value: goal.told(row.merit), bound: goal.told(row.bound), listed: row.listed };
        Proved {
            grasps: rows.into_iter().map(grasp).collect(),
            best_bound: told(best_bound),
            rest_bound: told(rest),
            best_gap,
            gap,
            proved: gap <= goal.gap() + ROUNDING,
            complete: !self.spent,
            boxes: self.boxes,
            families: self.families,
            opened: self.opened,
            scored: self.tally.scored,
            closed: self.tally.closed,
            polished: self.polished && inconclusive == 0,
            inconclusive,
        }
    }
}

/// What a gap may be wider by and still be the one asked for.
const ROUNDING: f64 = 1e-6;

/// A row of the list, with merits.
struct Row {
    listed: Listed,
    merit: f64,
    bound: f64,
}

/// The grasp of a lead in the middle of its plateau; nothing when its two ways of scoring disagree.
fn row(setting: &Setting<'_>, family: &Family, lead: Lead, bound: f64, is_first: bool) -> (Option<Row>, Tally) {
    let mut plot = Plot::new(setting, family);
    let lead = improve::to_the_middle(&mut plot, lead, is_first);
    (confirmed(setting, &plot, lead, bound), plot.gauge.tally)
}

fn confirmed(setting: &Setting<'_>, plot: &Plot<'_>, lead: Lead, bound: f64) -> Option<Row> {
    let listed = listed(setting, plot, &lead.at)?;
    Some(Row { listed, merit: lead.merit, bound: bound.max(lead.merit) })
}

/// The grasp of a placement; nothing when its two ways of scoring disagree.
fn listed(setting: &Setting<'_>, plot: &Plot<'_>, at: &Spots) -> Option<Listed> {
    let at = plot.spots(at);
    let rails = &plot.gauge.rails[..plot.gauge.k];
    let spots: Vec<Spot> = rails.iter().zip(at).map(|(rail, along_mm)| Spot { edge: rail.edge(), along_mm }).collect();
    let grasp = setting.scene.grasp(&spots).ok()?;
    let (assessment, doubts) = setting.scene.assess_for_list(&grasp);
    let sure = doubts.is_empty() && assessment.verdict == Verdict::Closed;
    let family = rails.iter().map(|rail| rail.stretch).collect();
    sure.then_some(Listed { grasp, family, assessment, bound: None })
}
