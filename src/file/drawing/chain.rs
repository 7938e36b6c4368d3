//! Loose strands joined into closed loops.
//!
//! Ends that lie on one another are joined first, whatever the tolerance; then open ends within the tolerance, the
//! nearest pair first. So a fine curve drawn in pieces shorter than the tolerance does not collapse, and a third end near
//! a joint stays open and is reported instead of being taken for one of the two.

use super::measure::Measure;
use super::strand::Strand;
use kurbo::Point;
use std::collections::HashMap;

/// Two ends closer than this fraction of the drawing are one point.
const SAME: f64 = 1e-12;

/// What became of the strands.
#[derive(Debug, Default)]
pub(super) struct Chained {
    /// Closed loops: every strand here is closed and has a source for each edge.
    pub(super) loops: Vec<Loop>,
    /// Runs of strands that do not close, with their two ends.
    pub(super) open: Vec<Open>,
    /// Points where more than two strands end.
    pub(super) forks: Vec<Fork>,
    /// Strands without length.
    pub(super) without_length: usize,
    /// Strands that were there twice.
    pub(super) duplicates: usize,
    /// Joints made over a gap.
    pub(super) joints: usize,
    /// The largest gap.
    pub(super) largest_gap: f64,
}

/// A closed loop with the source of every edge.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Loop {
    /// Vertices.
    pub(super) vertices: Vec<Point>,
    /// Bulge of each edge.
    pub(super) bulges: Vec<f64>,
    /// Source of each edge.
    pub(super) sources: Vec<usize>,
}

/// A run that does not close.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Open {
    /// Its two ends.
    pub(super) ends: [Point; 2],
    /// Source of its first strand.
    pub(super) source: usize,
    /// Distance to the nearest other open end.
    pub(super) nearest: Option<f64>,
}

/// A point where more than two strands end.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Fork {
    /// The point.
    pub(super) at: Point,
    /// Where the strands come from, three or more.
    pub(super) sources: Vec<usize>,
}

/// A grid of points for finding those nearby.
struct Grid {
    cell: f64,
    cells: HashMap<(i64, i64), Vec<usize>>,
}

impl Grid {
    fn new(cell: f64) -> Self {
        Self { cell, cells: HashMap::new() }
    }

    fn key(&self, p: Point) -> (i64, i64) {
        // The casts saturate, which only makes far cells share a key.
        ((p.x / self.cell).floor() as i64, (p.y / self.cell).floor() as i64)
    }

    fn add(&mut self, p: Point, number: usize) {
        let key = self.key(p);
        self.cells.entry(key).or_default().push(number);
    }

    /// Numbers of points in the cell of `p` and the eight around it: all those within a cell's width, and some more.
    fn near(&self, p: Point) -> impl Iterator<Item = usize> + '_ {
        let (x, y) = self.key(p);
        (-1..=1)
            .flat_map(move |dx| (-1..=1).map(move |dy| (x.saturating_add(dx), y.saturating_add(dy))))
            .flat_map(move |key| self.cells.get(&key).into_iter().flatten().copied())
    }
}

/// Larger side of the box around points.
pub(super) fn size<'a>(points: impl Iterator<Item = &'a Point>) -> f64 {
    let mut low = Point::new(f64::INFINITY, f64::INFINITY);
    let mut high = Point::new(f64::NEG_INFINITY, f64::NEG_INFINITY);
    for p in points {
        low = Point::new(low.x.min(p.x), low.y.min(p.y));
        high = Point::new(high.x.max(p.x), high.y.max(p.y));
    }
    (high.x - low.x).max(high.y - low.y).max(0.0)
}

/// Joins strands into loops; ends closer than `join` belong together. With `prune` runs that dangle from a loop are taken
/// away, so that the loop is whole without them; they are among the open ones all the same.
pub(super) fn chain(strands: Vec<Strand>, join: f64, prune: bool, tell: &mut dyn FnMut(u64, u64)) -> Chained {
    let mut chained = Chained::default();
    let size = size(strands.iter().flat_map(|strand| &strand.vertices));
    let same = SAME * size;
    let mut open = Vec::new();
    let mut closed_gaps = Vec::new();
    for mut strand in strands {
        drop_short_edges(&mut strand, same);
        if strand.bulges.is_empty() {
            chained.without_length += 1;
        } else if strand.closed {
            if let Some(gap) = close_gap(&mut strand, join) {
                closed_gaps.push(gap);
            }
            chained.loops.push(Loop::of(strand));
        } else {
            open.push(strand);
        }
    }
    let mut open = without_duplicates(open, join, same, &mut chained.duplicates);
    let mut dangling = Vec::new();
    loop {
        let links = Links::of(&open, same, join);
        let runs = runs(&links, open.len(), tell);
        // A run with a free end that hangs on a fork hides a loop.
        let tails: Vec<usize> = (0..runs.len()).filter(|&i| prune && links.is_tail(&runs[i])).collect();
        if tails.is_empty() {
            build(open, &links, &runs, &mut chained);
            break;
        }
        let mut out = vec![false; open.len()];
        for &tail in &tails {
            dangling.push(Open::of(&open, &runs[tail]));
            runs[tail].ends.iter().for_each(|&end| out[end / 2] = true);
        }
        let mut number = 0;
        open.retain(|_| {
            number += 1;
            !out[number - 1]
        });
    }
    chained.joints += closed_gaps.len();
    chained.largest_gap = closed_gaps.into_iter().fold(chained.largest_gap, f64::max);
    chained.open.append(&mut dangling);
    nearest_ends(&mut chained.open);
    same_loops_once(&mut chained, join.max(same));
    chained
}

/// Takes out edges whose ends are one point.
fn drop_short_edges(strand: &mut Strand, same: f64) {
    let count = strand.bulges.len();
    let short = |edge: usize| {
        let (from, to, _) = strand.edge(edge);
        (to - from).hypot() <= same
    };
    if !(0..count).any(short) {
        return;
    }
    let kept: Vec<usize> = (0..count).filter(|&edge| !short(edge)).collect();
    let end = strand.end();
    let mut vertices: Vec<Point> = kept.iter().map(|&edge| strand.vertices[edge]).collect();
    if !strand.closed && !kept.is_empty() {
        vertices.push(end);
    }
    strand.bulges = kept.iter().map(|&edge| strand.bulges[edge]).collect();
    strand.vertices = vertices;
}

/// Takes out a straight closing edge within the tolerance, which a drawing has only because its numbers are rounded.
/// Returns its length.
fn close_gap(strand: &mut Strand, join: f64) -> Option<f64> {
    let last = strand.bulges.len() - 1;
    let (from, to, bulge) = strand.edge(last);
    let gap = (to - from).hypot();
    if bulge != 0.0 || gap > join || last < 2 {
        return None;
    }
    strand.vertices.pop();
    strand.bulges.pop();
    Some(gap)
}

/// Middle of an edge, on the arc.
fn middle((from, to, bulge): (Point, Point, f64)) -> Point {
    let chord = to - from;
    // A positive bulge lies on the right of its chord.
    from.midpoint(to) + kurbo::Vec2::new(chord.y, -chord.x) * (bulge / 2.0)
}

/// Drops edges of open strands that lie on one another; what is left of a strand may come apart.
fn without_duplicates(strands: Vec<Strand>, join: f64, same: f64, dropped: &mut usize) -> Vec<Strand> {
    let mut grid = Grid::new(join.max(same).max(f64::MIN_POSITIVE));
    // Edges kept so far, by number: ends and middle.
    let mut kept: Vec<[Point; 3]> = Vec::new();
    let mut result = Vec::with_capacity(strands.len());
    for strand in strands {
        let mut twice = Vec::new();
        for edge in 0..strand.bulges.len() {
            let (from, to, bulge) = strand.edge(edge);
            let at = middle((from, to, bulge));
            let length = (to - from).hypot();
            // Short edges must agree better, or neighbours would pass for one another.
            let near = join.min(1e-3 * length).max(same);
            let close = |p: Point, q: Point| (p - q).hypot() <= near;
            let is_twice = grid.near(at).any(|other| {
                let [a, b, m] = kept[other];
                close(m, at) && ((close(a, from) && close(b, to)) || (close(a, to) && close(b, from)))
            });
            if is_twice {
                twice.push(edge);
            } else {
                grid.add(at, kept.len());
                kept.push([from, to, at]);
            }
        }
        *dropped += twice.len();
        if twice.is_empty() {
            result.push(strand);
        } else {
            result.extend(split(&strand, &twice));
        }
    }
    result
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

/// Ends of open strands and what each is joined to. End 2 i is the first vertex of strand i, end 2 i + 1 its last.
#[derive(Default)]
struct Links {
    partner: Vec<Option<usize>>,
    /// Ends at a fork.
    forked: Vec<bool>,
    forks: Vec<Fork>,
    joints: usize,
    largest_gap: f64,
}

/// Strands that follow one another, each by the end it is entered at.
struct Run {
    ends: Vec<usize>,
    closed: bool,
}

impl Links {
    fn of(strands: &[Strand], same: f64, join: f64) -> Self {
        let ends: Vec<Point> = strands.iter().flat_map(|strand| [strand.vertices[0], strand.end()]).collect();
        let mut links = Self { partner: vec![None; ends.len()], forked: vec![false; ends.len()], ..Self::default() };
        links.join_same(&ends, strands, same);
        links.join_near(&ends, same, join);
        links
    }

    /// True for an open run with a fork at one end and nothing at the other.
    fn is_tail(&self, run: &Run) -> bool {
        let (first, last) = (run.ends[0], run.ends[run.ends.len() - 1] ^ 1);
        !run.closed && self.forked[first] != self.forked[last]
    }

    /// Ends at one point: two are joined, more are a fork.
    fn join_same(&mut self, ends: &[Point], strands: &[Strand], same: f64) {
        let mut grid = Grid::new(if same > 0.0 { 2.0 * same } else { f64::MIN_POSITIVE });
        // Groups of ends by the first of each.
        let mut group: Vec<usize> = Vec::with_capacity(ends.len());
        let mut members: HashMap<usize, Vec<usize>> = HashMap::new();
        for (end, &at) in ends.iter().enumerate() {
            let first = grid.near(at).find(|&other| (ends[other] - at).hypot() <= 2.0 * same);
            match first {
                Some(first) => members.entry(first).or_insert_with(|| vec![first]).push(end),
                None => grid.add(at, end),
            }
            group.push(first.unwrap_or(end));
        }
        let mut groups: Vec<_> = members.into_values().collect();
        groups.sort_unstable();
        for group in groups {
            if let [a, b] = group[..] {
                self.partner[a] = Some(b);
                self.partner[b] = Some(a);
            } else {
                group.iter().for_each(|&end| self.forked[end] = true);
                let sources = group.iter().map(|&end| strands[end / 2].source).collect();
                self.forks.push(Fork { at: ends[group[0]], sources });
            }
        }
    }

    /// Open ends within the tolerance, the nearest pair first.
    fn join_near(&mut self, ends: &[Point], same: f64, join: f64) {
        let open: Vec<usize> =
            (0..ends.len()).filter(|&end| self.partner[end].is_none() && !self.forked[end]).collect();
        if !(join > same) {
            return;
        }
        let mut grid = Grid::new(join);
        open.iter().for_each(|&end| grid.add(ends[end], end));
        let mut pairs: Vec<(f64, usize, usize)> = Vec::new();
        for &end in &open {
            // Where very many open ends crowd into one cell, pairs with the nearest few are enough.
            let mut near: Vec<(f64, usize)> = grid
                .near(ends[end])
                .filter(|&other| other != end)
                .map(|other| ((ends[other] - ends[end]).hypot(), other))
                .filter(|&(gap, _)| gap <= join)
                .take(MOST_CROWD)
                .collect();
            near.sort_by(|a, b| a.0.total_cmp(&b.0).then(a.1.cmp(&b.1)));
            pairs.extend(near.into_iter().filter(|&(_, other)| other > end).map(|(gap, other)| (gap, end, other)));
        }
        pairs.sort_by(|a, b| a.0.total_cmp(&b.0).then(a.1.cmp(&b.1)).then(a.2.cmp(&b.2)));
        for (gap, a, b) in pairs {
            if self.partner[a].is_none() && self.partner[b].is_none() {
                self.partner[a] = Some(b);
                self.partner[b] = Some(a);
                self.joints += 1;
                self.largest_gap = self.largest_gap.max(gap);
            }
        }
    }
}

/// Open ends looked at around one of them.
const MOST_CROWD: usize = 64;

/// Follows the links.
fn runs(links: &Links, count: usize, tell: &mut dyn FnMut(u64, u64)) -> Vec<Run> {
    let mut used = vec![false; count];
    let mut runs = Vec::new();
    // Open runs first, from each end that has no partner; what is left over is loops.
    let starts = (0..2 * count).filter(|&end| links.partner[end].is_none()).chain((0..count).map(|strand| 2 * strand));
    for (number, start) in starts.enumerate() {
        if number % 4096 == 0 {
            tell(number.min(count) as u64, count as u64);
        }
        if used[start / 2] {
            continue;
        }
        let mut run = Run { ends: Vec::new(), closed: false };
        let mut end = start;
        loop {
            used[end / 2] = true;
            run.ends.push(end);
            // Out at the other end of this strand.
            match links.partner[end ^ 1] {
                Some(next) if !used[next / 2] => end = next,
                next => {
                    run.closed = next == Some(start);
                    break;
                }
            }
        }
        runs.push(run);
    }
    runs
}

/// Makes loops and open runs of them.
fn build(mut strands: Vec<Strand>, links: &Links, runs: &[Run], chained: &mut Chained) {
    chained.forks.clone_from(&links.forks);
    (chained.joints, chained.largest_gap) = (links.joints, links.largest_gap);
    for run in runs {
        if !run.closed {
            chained.open.push(Open::of(&strands, run));
            continue;
        }
        let closed = Loop::joined(&mut strands, &run.ends);
        if closed.vertices.len() < 2 {
            chained.without_length += 1;
        } else {
            chained.loops.push(closed);
        }
    }
}

impl Open {
    fn of(strands: &[Strand], run: &Run) -> Self {
        let point = |end: usize| if end % 2 == 0 { strands[end / 2].vertices[0] } else { strands[end / 2].end() };
        let (first, last) = (run.ends[0], run.ends[run.ends.len() - 1] ^ 1);
        Self { ends: [point(first), point(last)], source: strands[first / 2].source, nearest: None }
    }
}

/// Distance from each open run to the nearest end of another, or between its own two: what `--join` would have to be.
/// Only for the first few, which are shown.
fn nearest_ends(open: &mut [Open]) {
    const SHOWN: usize = 20;
    let ends: Vec<Point> = open.iter().flat_map(|run| run.ends).collect();
    for (number, run) in open.iter_mut().take(SHOWN).enumerate() {
        let gaps = run.ends.iter().enumerate().flat_map(|(which, &at)| {
            let own = 2 * number + which;
            ends.iter().enumerate().filter(move |&(other, _)| other != own).map(move |(_, &end)| (end - at).hypot())
        });
        run.nearest = gaps.min_by(f64::total_cmp);
    }
}

impl Loop {
    fn of(strand: Strand) -> Self {
        let sources = vec![strand.source; strand.bulges.len()];
        Self { vertices: strand.vertices, bulges: strand.bulges, sources }
    }

    /// A loop of the strands entered at these ends. Where two do not quite meet, an arc keeps its end and a straight
    /// edge gives way; two of a kind meet half-way.
    fn joined(strands: &mut [Strand], run: &[usize]) -> Self {
        for &end in run.iter().filter(|&&end| end % 2 == 1) {
            strands[end / 2].turn_round();
        }
        for (i, &end) in run.iter().enumerate() {
            let (here, next) = (end / 2, run[(i + 1) % run.len()] / 2);
            let (from, to) = (strands[here].end(), strands[next].vertices[0]);
            if from == to {
                continue;
            }
            let straight = |bulge: Option<&f64>| bulge.is_none_or(|&bulge| bulge == 0.0);
            let (last, first) = (straight(strands[here].bulges.last()), straight(strands[next].bulges.first()));
            let at = match (last, first) {
                (true, false) => to,
                (false, true) => from,
                _ => from.midpoint(to),
            };
            let last = strands[here].vertices.len() - 1;
            strands[here].vertices[last] = at;
            strands[next].vertices[0] = at;
        }
        let mut joined = Self { vertices: Vec::new(), bulges: Vec::new(), sources: Vec::new() };
        for &end in run {
            let strand = &mut strands[end / 2];
            joined.sources.extend(std::iter::repeat_n(strand.source, strand.bulges.len()));
            joined.bulges.append(&mut strand.bulges);
            joined.vertices.extend_from_slice(&strand.vertices[..strand.vertices.len() - 1]);
        }
        joined.drop_points();
        joined
    }

    /// Takes out edges that a joint has left without length.
    fn drop_points(&mut self) {
        let n = self.vertices.len();
        let is_point = |edge: usize| self.vertices[edge] == self.vertices[(edge + 1) % n];
        if (0..n).any(is_point) {
            let kept: Vec<usize> = (0..n).filter(|&edge| !is_point(edge)).collect();
            self.vertices = kept.iter().map(|&edge| self.vertices[edge]).collect();
            self.bulges = kept.iter().map(|&edge| self.bulges[edge]).collect();
            self.sources = kept.iter().map(|&edge| self.sources[edge]).collect();
        }
    }

    /// Ends of an edge and its bulge.
    pub(super) fn edge(&self, edge: usize) -> (Point, Point, f64) {
        let next = if edge + 1 == self.vertices.len() { 0 } else { edge + 1 };
        (self.vertices[edge], self.vertices[next], self.bulges[edge])
    }
}

/// Drops loops that lie on another one, whatever they are drawn with.
fn same_loops_once(chained: &mut Chained, near: f64) {
    /// Points of one loop that are held against the other.
    const HELD: usize = 64;
    let measures: Vec<Measure> = chained.loops.iter().map(Measure::of).collect();
    let mut grid = Grid::new(near.max(f64::MIN_POSITIVE));
    let mut keep = Vec::with_capacity(measures.len());
    for (number, measure) in measures.iter().enumerate() {
        let this = &chained.loops[number];
        let is_twice = grid.near(measure.bounds.center()).any(|other| {
            measures[other].is_like(measure, near) && {
                let step = this.vertices.len().div_ceil(HELD);
                (0..this.vertices.len())
                    .step_by(step)
                    .flat_map(|edge| [this.vertices[edge], middle(this.edge(edge))])
                    .all(|point| chained.loops[other].is_near(point, near))
            }
        });
        if !is_twice {
            grid.add(measure.bounds.center(), number);
        }
        keep.push(!is_twice);
    }
    chained.duplicates += keep.iter().filter(|keep| !**keep).count();
    let mut number = 0;
    chained.loops.retain(|_| {
        number += 1;
        keep[number - 1]
    });
}

impl Strand {
    /// Runs an open strand the other way.
    fn turn_round(&mut self) {
        self.vertices.reverse();
        self.bulges.reverse();
        self.bulges.iter_mut().for_each(|bulge| *bulge = -*bulge);
    }
}
