//! The second round of a family: its closed members put under the loads, until the best of those that hold is known.

use super::load_check::LoadCheck;
use super::order::{self, Candidate, Key};
use super::screen::Run;
use std::cmp::Reverse;

/// The best so far. What the tie-breaks ask of it is found once someone may tie with it.
#[derive(Default)]
struct Lead {
    best: Option<Candidate>,
    settled: bool,
}

impl Run<'_, '_> {
    /// The best member that holds every load, if it enters the list. `first` is the best of them without the loads.
    pub(super) fn best_under_load(&mut self, first: Candidate) -> Option<Candidate> {
        self.friction_under_load = self.screen.key == Key::Friction;
        let in_order = self.screen.key != Key::Friction && !self.screen.key.is_by_squeeze();
        if in_order {
            // The loads change nothing in the order, so that if it holds no other can be better.
            let mut best = first;
            self.set = best.sites;
            if self.stands(&mut best, None) {
                self.settle(&mut best);
                return Some(best);
            }
        }
        let mut members = std::mem::take(&mut self.members);
        members.retain(|member| !in_order || member.sites != first.sites);
        // The best without the loads is likely the best with them, and then a hard one to beat.
        members.sort_by_key(|member| (Reverse(member.key), member.sites != first.sites));
        let mut lead = Lead::default();
        for mut member in members {
            self.set = member.sites;
            match self.key_under_load(lead.best.as_ref()) {
                None => continue,
                Some(None) => {}
                Some(Some(key)) => member.key = key,
            }
            match &mut lead.best {
                // Only squeeze is not in order by now.
                Some(best) if member.key < best.key && !self.screen.key.is_by_squeeze() => break,
                Some(best) if member.key == best.key && !lead.settled => {
                    self.settle(best);
                    lead.settled = true;
                }
                _ => {}
            }
            let bar = lead.best.or_else(|| self.tally.top.worst().copied());
            if self.stands(&mut member, bar.as_ref()) {
                lead = Lead { best: Some(member), settled: false };
            }
        }
        if let (Some(best), false) = (&mut lead.best, lead.settled) {
            self.settle(best);
        }
        lead.best
    }

    /// The largest squeeze the load floor allows, N.
    fn most_n(&self, loads: &LoadCheck<'_>) -> f64 {
        let floor = self.screen.scene.setup().floors.load_margin;
        if floor > 0.0 { loads.limit_n / floor } else { f64::INFINITY }
    }

    /// The key of the current set where only the loads tell it. Nothing at all when it is known to be behind the best or
    /// beyond the limit.
    #[expect(clippy::option_option, reason = "out of the question, decided before, and decided now are three things")]
    pub(super) fn key_under_load(&mut self, best: Option<&Candidate>) -> Option<Option<i64>> {
        if !self.screen.key.is_by_squeeze() {
            return Some(None);
        }
        let levers = self.levers();
        let Some(mut loads) = self.loads.take() else { return Some(None) };
        let most_n = self.most_n(&loads);
        let bar = best.or_else(|| self.tally.top.worst());
        let unit_n = if self.screen.key == Key::LoadMargin { loads.limit_n } else { loads.size_n };
        let bar_n = bar.map_or(f64::INFINITY, |bar| order::squeeze_above(bar.key, unit_n));
        let squeeze_n = loads.squeeze_n(&levers[..self.k], &self.forces.mus[..self.k], most_n.min(bar_n));
        let key = squeeze_n.map(|squeeze_n| order::squeeze_quanta(squeeze_n, unit_n));
        self.tally.not_held += u64::from(key.is_none() && bar.is_none());
        self.loads = Some(loads);
        key.map(Some)
    }

    /// Whether the current set comes before the bar, if there is one, and holds every load.
    pub(super) fn stands(&mut self, candidate: &mut Candidate, bar: Option<&Candidate>) -> bool {
        if let Some(bar) = bar
            && !self.comes_before(candidate, bar)
        {
            return false;
        }
        let levers = self.levers();
        let Some(mut loads) = self.loads.take() else { return true };
        let (levers, mus) = (&levers[..self.k], &self.forces.mus[..self.k]);
        let floors = &self.screen.scene.setup().floors;
        // By squeeze it is known already; without a floor whatever closes is listed.
        let held = self.screen.key.is_by_squeeze()
            || floors.load_margin <= 0.0
            || loads.within(levers, mus, 1.0, self.most_n(&loads));
        // Whoever lists what is not held asks for friction margin of closure alone.
        let at_margin = floors.friction_margin <= 1.0
            || floors.load_margin < 1.0
            || (held && loads.holds(levers, mus, 1.0 / floors.friction_margin));
        self.tally.not_held += u64::from(!(held && at_margin));
        self.loads = Some(loads);
        held && at_margin
    }

    /// Where friction is the key, whether the current set holds every load with all friction multiplied by a factor.
    pub(super) fn holds_at(&mut self, factor: f64) -> bool {
        let levers = self.levers();
        match &mut self.loads {
            Some(loads) if self.friction_under_load => {
                loads.holds(&levers[..self.k], &self.forces.mus[..self.k], factor)
            }
            _ => true,
        }
    }
}
