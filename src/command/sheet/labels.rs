//! Finding room for labels: beside one another on a line, and in the free places of a drawing.

use nalgebra::{Point2, Rotation2, Vector2};

/// Places for labels on a line, as near to where they are wanted (in rising order) as a least distance between
/// neighbours and the ends of the line allow.
///
/// With the distances taken out the places must not fall, and the nearest such row is the isotonic regression: of
/// neighbours that would fall, both go to their mean (pool adjacent violators, Ayer et al. 1955).
pub(super) fn spread(wanted: &[f64], apart: f64, ends: (f64, f64)) -> Vec<f64> {
    let mut pools: Vec<(f64, usize)> = Vec::with_capacity(wanted.len());
    for (i, place) in wanted.iter().enumerate() {
        pools.push((place - apart * i as f64, 1));
        while let [.., (before, n), (last, m)] = pools[..]
            && last < before
        {
            pools.truncate(pools.len() - 2);
            pools.push(((before * n as f64 + last * m as f64) / (n + m) as f64, n + m));
        }
    }
    let most = ends.1 - apart * wanted.len().saturating_sub(1) as f64;
    let flat = pools.into_iter().flat_map(|(place, n)| std::iter::repeat_n(place.min(most).max(ends.0), n));
    flat.enumerate().map(|(i, place)| place + apart * i as f64).collect()
}

/// What is already drawn, as circles on paper.
#[derive(Debug, Default)]
pub(super) struct Taken(Vec<(Point2<f64>, f64)>);

impl Taken {
    /// Notes that a circle is taken.
    pub(super) fn add(&mut self, centre: Point2<f64>, radius: f64) {
        self.0.push((centre, radius));
    }

    /// How much of what is drawn a circle would lie on.
    fn under(&self, centre: Point2<f64>, radius: f64) -> f64 {
        self.0.iter().map(|(other, own)| (radius + own - (centre - other).norm()).max(0.0).min(2.0 * own)).sum()
    }

    /// The freest place for a round label beside a point: near it, and on the side of a direction where that will do.
    pub(super) fn place(&mut self, beside: Point2<f64>, away: Vector2<f64>, least: f64, radius: f64) -> Point2<f64> {
        const TURNS: [f64; 11] = [0.0, 25.0, -25.0, 50.0, -50.0, 75.0, -75.0, 100.0, -100.0, 140.0, -140.0];
        let mut best = (f64::INFINITY, beside);
        for step in 0..5 {
            for turn in TURNS {
                let direction = Rotation2::new(turn.to_radians()) * away;
                let centre = beside + direction * (least + f64::from(step) * radius * 0.7);
                let cost = 10.0 * self.under(centre, radius) + f64::from(step) + turn.abs() / 60.0;
                if cost < best.0 {
                    best = (cost, centre);
                }
            }
        }
        self.add(best.1, radius);
        best.1
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn labels_keep_apart_and_near() {
        let close = |a: &[f64], b: &[f64]| a.len() == b.len() && a.iter().zip(b).all(|(a, b)| (a - b).abs() < 1e-12);
        assert!(close(&spread(&[1.0, 9.0], 3.0, (0.0, 20.0)), &[1.0, 9.0]));
        // Two at one place go half the distance to either side.
        assert!(close(&spread(&[5.0, 5.0], 3.0, (0.0, 20.0)), &[3.5, 6.5]));
        assert!(close(&spread(&[5.0, 5.5, 6.0, 15.0], 3.0, (0.0, 20.0)), &[2.5, 5.5, 8.5, 15.0]));
        assert!(close(&spread(&[0.0, 0.0, 20.0, 20.0], 3.0, (0.0, 20.0)), &[0.0, 3.0, 17.0, 20.0]));
        assert!(spread(&[], 3.0, (0.0, 1.0)).is_empty());
    }

    #[test]
    fn a_label_goes_where_nothing_is() {
        let mut taken = Taken::default();
        let up = Vector2::new(0.0, -1.0);
        let first = taken.place(Point2::origin(), up, 4.0, 2.0);
        assert!((first - Point2::new(0.0, -4.0)).norm() < 1e-12);
        let second = taken.place(Point2::origin(), up, 4.0, 2.0);
        assert!((second - first).norm() >= 3.0, "{second}");
    }
}
