//! Where a search begins: good placements found by exchanging one finger at a time, and cases that need no search.

use super::super::families::Family;
use super::super::rank::{Cancel, Cancelled};
use super::super::scene::Spot;
use super::gauge::Spots;
use super::improve;
use super::plot::{Lead, Plot};
use super::rail::{Rail, middle};
use super::{Setting, Tally};
use crate::hand::{Closing, FingerCount, Tip};
use rand_chacha::ChaCha8Rng;
use rand_chacha::rand_core::{Rng, SeedableRng};
use rayon::prelude::*;

/// Starts, at least.
const STARTS: usize = 8;
/// Sets drawn for each start; the best of them is taken.
const DRAWS: usize = 48;
/// Rounds of exchanges for each start, at most.
const MOST_ROUNDS: usize = 6;
/// Stretches tried in one exchange, at most.
const MOST_TRIED: usize = 160;

/// Fewer than four point contacts without friction never close (Reuleaux 1876; Somov 1897): no search finds a grasp.
pub(super) fn never_closes(setting: &Setting<'_>) -> bool {
    let point = |flush: bool| setting.scene.setup().hand.tip == Tip::Pin || !flush;
    setting.fingers < 4 && setting.rails.iter().all(|rail| rail.mu <= 0.0 && point(rail.is_flush()))
}

/// Placements found, and how many were looked at.
pub(super) type Found = (Vec<(Family, Lead)>, Tally);

/// Good placements of some families, each start with a random stream of its own; more of them the more rows are `missing`.
pub(super) fn leads(setting: &Setting<'_>, missing: usize, cancel: &Cancel) -> Result<Found, Cancelled> {
    let mut tally = Tally::default();
    if setting.rails.is_empty() || never_closes(setting) {
        return Ok((Vec::new(), tally));
    }
    let starts = STARTS + missing / 2;
    let found: Vec<Option<Found>> = (0..starts as u64)
        .into_par_iter()
        .map(|stream| (!cancel.is_cancelled()).then(|| Start::new(setting, stream).leads()))
        .collect();
    let mut all = Vec::new();
    for own in found {
        let (leads, counted) = own.ok_or(Cancelled)?;
        all.extend(leads);
        tally.add(counted);
    }
    Ok((all, tally))
}

/// A placement known already, as leads of the families it belongs to; none where it is no grasp here. Jaws may stand so on
/// more than one run.
pub(super) fn known(setting: &Setting<'_>, spots: &[Spot]) -> Vec<(Family, Lead)> {
    let on = |spot: &Spot| {
        let stands = |rail: &&Rail<'_>| {
            rail.edge() == spot.edge
                && rail.whole[0] - AT_END_MM <= spot.along_mm
                && spot.along_mm <= rail.whole[1] + AT_END_MM
        };
        let rail = setting.rails.iter().find(stands)?;
        Some((rail.stretch, spot.along_mm.clamp(rail.whole[0], rail.whole[1])))
    };
    let Some(mut placed) = spots.iter().map(on).collect::<Option<Vec<_>>>() else { return Vec::new() };
    if placed.len() != setting.fingers {
        return Vec::new();
    }
    placed.sort_by(|a, b| a.0.cmp(&b.0).then(a.1.total_cmp(&b.1)));
    if placed.iter().take(setting.kept).enumerate().any(|(finger, (rail, _))| *rail != finger) {
        return Vec::new();
    }
    let mut at = [0.0; FingerCount::MOST];
    let mut candidates = Vec::new();
    if setting.scene.setup().hand.closing == Closing::Parallel {
        for (number, run) in setting.scene.jaw_runs().iter().enumerate() {
            if run.stretches == [placed[0].0, placed[1].0]
                && let Some(u_mm) = run.u_mm([placed[0].1, placed[1].1])
            {
                at[0] = u_mm;
                candidates.push((Family::new(&[number as u32]), at));
            }
        }
    } else {
        at.iter_mut().zip(&placed).for_each(|(at, (_, along_mm))| *at = *along_mm);
        let on: Vec<u32> = placed.iter().map(|(stretch, _)| *stretch as u32).collect();
        candidates.push((Family::new(&on), at));
    }
    let lead = |(family, at): (Family, Spots)| {
        let merit = Plot::new(setting, &family).value(&at, f64::NEG_INFINITY)?;
        Some((family, Lead { merit, at }))
    };
    candidates.into_iter().filter_map(lead).collect()
}

/// How far outside its stretch a position may lie that went through a file, mm.
const AT_END_MM: f64 = 1e-6;

struct Start<'a> {
    setting: &'a Setting<'a>,
    random: ChaCha8Rng,
    tally: Tally,
}

impl<'a> Start<'a> {
    fn new(setting: &'a Setting<'a>, stream: u64) -> Self {
        let mut random = ChaCha8Rng::seed_from_u64(setting.scene.setup().search.seed);
        random.set_stream(stream);
        Self { setting, random, tally: Tally::default() }
    }

    fn pick(&mut self, count: usize) -> usize {
        (self.random.next_u64() % count as u64) as usize
    }

    /// The best of some draws, with fingers exchanged until none gains, and what was come by on the way.
    fn leads(mut self) -> Found {
        let mut found: Vec<(Family, Lead)> = Vec::new();
        for _ in 0..DRAWS {
            let on = self.draw();
            let beat = found.last().map_or(f64::NEG_INFINITY, |(_, lead)| lead.merit);
            found.extend(self.at_middles(on, beat));
        }
        let Some((mut family, mut lead)) = found.last().copied() else { return (found, self.tally) };
        for _ in 0..MOST_ROUNDS {
            let before = lead.merit;
            for finger in self.setting.kept..self.setting.fingers {
                if let Some(better) = self.exchange(&family, finger, lead.merit) {
                    found.push(better);
                    (family, lead) = better;
                }
            }
            let mut plot = Plot::new(self.setting, &family);
            lead = improve::climb(&mut plot, lead);
            self.tally.add(plot.gauge.tally);
            found.push((family, lead));
            if lead.merit <= before {
                break;
            }
        }
        (found, self.tally)
    }

    fn draw(&mut self) -> Vec<u32> {
        let (kept, rails) = (self.setting.kept, self.setting.rails.len());
        let mut on: Vec<u32> = (0..kept as u32).collect();
        on.extend((kept..self.setting.fingers).map(|_| (kept + self.pick((rails - kept).max(1))) as u32));
        on.sort_unstable();
        on
    }

    /// A family with every finger in the middle of its stretch, those that share one spread evenly.
    fn at_middles(&mut self, on: Vec<u32>, beat: f64) -> Option<(Family, Lead)> {
        let family = Family::new(&on);
        let mut plot = Plot::new(self.setting, &family);
        let whole = plot.whole();
        let mut at = whole.map(middle);
        for run in on.chunk_by(|a, b| a == b).filter(|run| run.len() > 1) {
            let first = on.partition_point(|stretch| *stretch < run[0]);
            let [from, to] = whole[first];
            if from >= to {
                return None;
            }
            for i in 0..run.len() {
                at[first + i] = from + (to - from) * i as f64 / (run.len() - 1) as f64;
            }
        }
        let merit = plot.value(&at, beat);
        self.tally.add(plot.gauge.tally);
        merit.map(|merit| (family, Lead { merit, at }))
    }

    /// The family with one finger on the stretch where it gains most, every finger in the middle of its own.
    fn exchange(&mut self, family: &Family, finger: usize, beat: f64) -> Option<(Family, Lead)> {
        let rails = self.setting.rails.len();
        let stride = rails.div_ceil(MOST_TRIED);
        let offset = self.pick(stride);
        let mut best: Option<(Family, Lead)> = None;
        for next in (self.setting.kept + offset..rails).step_by(stride) {
            let mut on = family.stretches().to_vec();
            on[finger] = next as u32;
            on.sort_unstable();
            let beat = best.map_or(beat, |(_, lead)| lead.merit);
            if let Some(better) = self.at_middles(on, beat) {
                best = Some(better);
            }
        }
        best
    }
}
