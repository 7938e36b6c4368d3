//! What is drawn twice: edges of open strands, and whole loops. Found by trees over all their numbers, so that neither
//! crowds nor far outliers make the search quadratic.

use super::chain::Loop;
use super::measure::Measure;
use super::strand::Strand;
use kurbo::Point;
use rstar::RTree;
use rstar::primitives::GeomWithData;

/// Middle of an edge, on the arc.
fn middle((from, to, bulge): (Point, Point, f64)) -> Point {
    let chord = to - from;
    // A positive bulge lies on the right of its chord.
    from.midpoint(to) + kurbo::Vec2::new(chord.y, -chord.x) * (bulge / 2.0)
}

/// Ends and middle of an edge as one point of six numbers.
fn signature(edge: (Point, Point, f64)) -> [f64; 6] {
    let (from, to, _) = edge;
    let at = middle(edge);
    [from.x, from.y, to.x, to.y, at.x, at.y]
}

/// Drops edges of open strands that lie on one another; what is left of a strand may come apart. Edges are the same when
/// their ends and middles are within `join`, in either direction; short edges must agree better, or neighbours would pass
/// for one another.
pub(super) fn without_duplicates(strands: Vec<Strand>, join: f64, same: f64, dropped: &mut usize) -> Vec<Strand> {
    let edges = || strands.iter().flat_map(|strand| (0..strand.bulges.len()).map(|edge| strand.edge(edge)));
    let first: Vec<[f64; 6]> = edges().map(signature).collect();
    let second: Vec<[f64; 6]> = edges().map(|(from, to, bulge)| signature((to, from, -bulge))).collect();
    let tree = RTree::bulk_load(first.iter().enumerate().map(|(i, &at)| GeomWithData::new(at, i)).collect());
    let twice = drawn_twice(first.len(), |number, ask| {
        let at = &first[number];
        let near = join.min(1e-3 * (at[2] - at[0]).hypot(at[3] - at[1])).max(same);
        let ways = [at, &second[number]];
        let alike = |other: usize| ways.iter().any(|way| square(way, &first[other]) <= near * near);
        ways.iter().any(|way| tree.locate_within_distance(**way, near * near).any(|other| ask(other.data, &alike)))
    });
    let mut number = 0;
    let mut result = Vec::with_capacity(strands.len());
    for strand in strands {
        let out: Vec<usize> = (0..strand.bulges.len()).filter(|edge| twice[number + edge]).collect();
        number += strand.bulges.len();
        *dropped += out.len();
        if out.is_empty() {
            result.push(strand);
        } else {
            result.extend(split(&strand, &out));
        }
    }
    result
}

/// Which of so many things are like one that stays. `search` is given a number and must put to its second argument the
/// numbers of things that may be alike, with the question whether they are, until that says yes.
///
/// Things are gone through in an order that has nothing to do with that of the search, so that in a crowd of like ones a
/// search soon meets one that was before it. What is like a thing that was dropped must be like the one that stays for
/// it, or a row of things would go one by one.
fn drawn_twice(
    count: usize,
    search: impl Fn(usize, &mut dyn FnMut(usize, &dyn Fn(usize) -> bool) -> bool) -> bool,
) -> Vec<bool> {
    // Odd, so that no two numbers share a rank (Knuth, The Art of Computer Programming, volume 3, section 6.4).
    let rank = |number: usize| (number as u64).wrapping_mul(0x9e37_79b9_7f4a_7c15);
    let mut order: Vec<usize> = (0..count).collect();
    order.sort_unstable_by_key(|&number| rank(number));
    let mut stays: Vec<usize> = (0..count).collect();
    for number in order {
        let mut for_it = None;
        search(number, &mut |other, alike| {
            let found = rank(other) < rank(number) && alike(stays[other]);
            if found {
                for_it = Some(stays[other]);
            }
            found
        });
        stays[number] = for_it.unwrap_or(number);
    }
    stays.iter().enumerate().map(|(number, &stays)| stays != number).collect()
}

/// The runs of an open strand between the edges taken out.
fn split(strand: &Strand, out: &[usize]) -> Vec<Strand> {
    let mut runs = Vec::new();
    let mut begin = 0;
    for &edge in out.iter().chain([&strand.bulges.len()]) {
        if edge > begin {
            runs.push(Strand {
                vertices: strand.vertices[begin..=edge].to_vec(),
                bulges: strand.bulges[begin..edge].to_vec(),
                closed: false,
                source: strand.source,
            });
        }
        begin = edge + 1;
    }
    runs
}

/// Loops are the same when nowhere farther apart than this fraction of their size, and than the tolerance of joining.
const LOOP: f64 = 1e-5;

/// Square of the distance between two signatures.
fn square(a: &[f64; 6], b: &[f64; 6]) -> f64 {
    a.iter().zip(b).map(|(a, b)| (a - b) * (a - b)).sum()
}

/// Drops loops that lie on another one, whatever they are drawn with. Returns how many.
pub(super) fn same_loops_once(loops: &mut Vec<Loop>, join: f64, same: f64) -> usize {
    /// Points of one loop that are held against the other.
    const HELD: usize = 64;
    let measures: Vec<Measure> = loops.iter().map(Measure::of).collect();
    let corners = |measure: &Measure| {
        let bounds = measure.bounds;
        [bounds.x0, bounds.y0, bounds.x1, bounds.y1, measure.area.abs() / measure.length]
    };
    let tree = RTree::bulk_load(measures.iter().enumerate().map(|(i, m)| GeomWithData::new(corners(m), i)).collect());
    let twice = drawn_twice(loops.len(), |number, ask| {
        let (this, measure) = (&loops[number], &measures[number]);
        let near = join.min(LOOP * measure.bounds.width().max(measure.bounds.height())).max(same);
        let step = this.vertices.len().div_ceil(HELD);
        let on = |other: usize| {
            (0..this.vertices.len())
                .step_by(step)
                .flat_map(|edge| [this.vertices[edge], middle(this.edge(edge))])
                .all(|point| loops[other].is_near(point, near))
        };
        // Sides move by `near` at most, and the width of the loop with them.
        let square = 5.0 * (2.0 * near).powi(2);
        tree.locate_within_distance(corners(measure), square).any(|other| ask(other.data, &on))
    });
    let mut number = 0;
    loops.retain(|_| {
        number += 1;
        !twice[number - 1]
    });
    twice.iter().filter(|twice| **twice).count()
}
