//! Cleaning on request: vertices between edges in line taken out, short edges dropped. No ring comes or goes; whether
//! the rings still keep clear of one another is for the checks of a part to say.

use super::chain::Loop;

/// Fewest vertices of a ring that cleaning leaves.
const FEWEST: usize = 3;

impl Loop {
    /// Takes out vertices between two straight edges that turn by less than an angle, rad. Returns how many. A vertex
    /// stays when the edges merged so far would turn by more than the angle altogether, so that a curve drawn in short
    /// edges does not unroll.
    pub(super) fn merge_in_line(&mut self, angle: f64) -> usize {
        let n = self.vertices.len();
        let turn_at = |before: usize, at: usize| {
            let (p, q, b) = self.edge(before);
            let (_, r, c) = self.edge(at);
            let straight = b == 0.0 && c == 0.0;
            straight.then(|| (q - p).cross(r - q).atan2((q - p).dot(r - q)))
        };
        // The vertex to begin with stays, so that the last run does not reach over it: a sharp one where there is one.
        let sharp = |at: &usize| turn_at((at + n - 1) % n, *at).is_none_or(|turn| turn.abs() >= angle);
        let first = (0..n).find(sharp).unwrap_or(0);
        let mut out = vec![false; n];
        let mut left = n;
        let mut turned = 0.0_f64;
        for at in (1..n).map(|step| (first + step) % n) {
            let turn = turn_at((at + n - 1) % n, at);
            match turn {
                Some(turn) if (turned + turn).abs() < angle && turn.abs() < angle && left > FEWEST => {
                    turned += turn;
                    out[at] = true;
                    left -= 1;
                }
                _ => turned = 0.0,
            }
        }
        self.take_out(&out);
        n - left
    }

    /// Drops edges shorter than a length: their two vertices become one at the middle, or at the end that an arc beside
    /// them keeps. Returns how many.
    pub(super) fn drop_shorter(&mut self, length: f64) -> usize {
        let mut dropped = 0;
        let mut at = 0;
        while at < self.vertices.len() && self.vertices.len() > FEWEST {
            let n = self.vertices.len();
            let (from, to, bulge) = self.edge(at);
            // An arc is at least as long as its chord.
            let long = (to - from).hypot() * if bulge == 0.0 { 1.0 } else { 1.0 + bulge * bulge };
            if !(long < length) {
                at += 1;
                continue;
            }
            let (before, after) = (self.bulges[(at + n - 1) % n] == 0.0, self.bulges[(at + 1) % n] == 0.0);
            let merged = match (before, after) {
                (true, false) => to,
                (false, true) => from,
                _ => from.midpoint(to),
            };
            self.vertices[(at + 1) % n] = merged;
            self.vertices.remove(at);
            self.bulges.remove(at);
            self.sources.remove(at);
            dropped += 1;
        }
        dropped
    }

    /// Takes out vertices, each with the edge that leaves it.
    fn take_out(&mut self, out: &[bool]) {
        let kept: Vec<usize> = (0..self.vertices.len()).filter(|&at| !out[at]).collect();
        self.vertices = kept.iter().map(|&at| self.vertices[at]).collect();
        self.bulges = kept.iter().map(|&at| self.bulges[at]).collect();
        self.sources = kept.iter().map(|&at| self.sources[at]).collect();
    }
}
