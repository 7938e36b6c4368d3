//! Better placements near a known one: a climb by steps along the edges, and the way to the middle of a plateau.

use super::gauge::Spots;
use super::plot::{Lead, Plot};
use crate::hand::FingerCount;

/// Steps of a climb get half as long so many times.
const HALVINGS: u32 = 12;
/// The same on the way to the middle of a plateau: for the first row, and for the others, whose last digits nobody reads.
const FINE_HALVINGS: [u32; 2] = [26, 15];
/// Steps of one length, at most.
const MOST_STEPS: usize = 12;

/// Climbs from a placement: steps along one edge at a time, and along all together, halved when none leads up. Stretch ends
/// are reached because steps are cut to the stretch.
pub(super) fn climb(plot: &mut Plot<'_>, mut lead: Lead) -> Lead {
    let whole = plot.whole();
    let mut step = 0.25;
    for _ in 0..HALVINGS {
        for _ in 0..MOST_STEPS {
            let mut better = false;
            for dim in 0..plot.dims {
                let length = whole[dim][1] - whole[dim][0];
                for way in [step, -step] {
                    let mut at = lead.at;
                    at[dim] = plot.held(dim, at[dim] + way * length, &whole);
                    if let Some(merit) = plot.value(&at, lead.merit) {
                        lead = Lead { merit, at };
                        better = true;
                        break;
                    }
                }
            }
            if !better {
                break;
            }
        }
        step /= 2.0;
    }
    lead
}

/// What decides between placements of one family that are equal on the key: placement tolerance, then what closure alone would
/// allow, then the least room, then that of all fingers. So many, that from any start the same place is come to.
type Rank = (i64, [i64; 4]);

fn rank(plot: &Plot<'_>, merit: f64, at: &Spots) -> Rank {
    let spots = plot.spots(at);
    let scale_mm = plot.gauge.scale_mm();
    let comfort = plot.gauge.comfort(&spots[..plot.gauge.k]);
    (plot.gauge.goal().quanta(merit), comfort.map(|mm| super::super::order::quanta(mm / scale_mm)))
}

/// Moves a placement to where tolerance is largest among those equal on the key (or better): along every edge, and along all
/// of them in every combination of senses, so that a pair that can only move together does.
pub(super) fn to_the_middle(plot: &mut Plot<'_>, mut lead: Lead, is_first: bool) -> Lead {
    let whole = plot.whole();
    let mut best = rank(plot, lead.merit, &lead.at);
    let directions = directions(plot.dims);
    let longest = (0..plot.dims).map(|dim| whole[dim][1] - whole[dim][0]).fold(0.0, f64::max);
    let mut step = longest / 4.0;
    for _ in 0..FINE_HALVINGS[usize::from(!is_first)] {
        for _ in 0..MOST_STEPS {
            let mut better = false;
            for direction in &directions {
                let mut at = lead.at;
                for (dim, way) in direction.iter().enumerate().take(plot.dims) {
                    at[dim] = plot.held(dim, at[dim] + way * step, &whole);
                }
                // Half a quantum may be lost and not be missed.
                let beat = lead.merit - 1e-9 * (1.0 + lead.merit.abs());
                let Some(merit) = plot.value(&at, beat) else { continue };
                let own = rank(plot, merit, &at);
                if own > best {
                    (best, lead) = (own, Lead { merit, at });
                    better = true;
                }
            }
            if !better {
                break;
            }
        }
        step /= 2.0;
    }
    lead
}

/// Unit steps along one parameter, along two of them together, and along all.
fn directions(dims: usize) -> Vec<Spots> {
    let mut all = Vec::new();
    for first in 0..dims {
        for way in [1.0, -1.0] {
            let mut one = [0.0; FingerCount::MOST];
            one[first] = way;
            all.push(one);
            for second in first + 1..dims {
                for other in [1.0, -1.0] {
                    let mut two = one;
                    two[second] = other;
                    all.push(two);
                }
            }
        }
    }
    if dims > 2 {
        for signs in 0..1_u32 << dims {
            let way = |dim: usize| {
                if dim >= dims {
                    0.0
                } else if signs >> dim & 1 == 0 {
                    1.0
                } else {
                    -1.0
                }
            };
            all.push(std::array::from_fn(way));
        }
    }
    all
}
