//! Where points of the part lie on paper, and at what scale.

use nalgebra::{Point2, Vector2};

/// What a drawing is enlarged or reduced by, times a power of ten. The standard steps (1, 2, 5: ISO 5455) alone would
/// leave half of many pages empty.
const STEPS: [f64; 10] = [1.0, 1.25, 1.5, 2.0, 2.5, 3.0, 4.0, 5.0, 6.0, 8.0];

/// The largest scale with a step of the row that is not above a given one: millimetres of paper for each of the part.
pub(super) fn scale_below(most: f64) -> f64 {
    if !(most.is_normal() && most > 0.0) {
        return 1.0;
    }
    let hair = 1.0 + 1e-9;
    if most >= 1.0 {
        let decade = 10_f64.powf(most.log10().floor());
        return STEPS.map(|step| decade * step).into_iter().filter(|scale| *scale <= most * hair).fold(1.0, f64::max);
    }
    let decade = 10_f64.powf((1.0 / most).log10().floor());
    let enough = STEPS.into_iter().map(|step| decade * step).find(|reduced| reduced * most * hair >= 1.0);
    1.0 / enough.unwrap_or(10.0 * decade)
}

/// A scale as it is written, 1:2 or 5:1.
pub(super) fn scale_word(scale: f64) -> String {
    let plain = |value: f64| format!("{}", (value * 1e6).round() / 1e6);
    if scale >= 1.0 { format!("{}:1", plain(scale)) } else { format!("1:{}", plain(1.0 / scale)) }
}

/// A length of the row 1, 2, 5 times a power of ten that is not above a given one.
pub(super) fn round_length(most: f64) -> f64 {
    let decade = 10_f64.powf(most.max(f64::MIN_POSITIVE).log10().floor());
    [1.0, 2.0, 5.0].map(|step| decade * step).into_iter().filter(|length| *length <= most).fold(decade, f64::max)
}

/// A box of the part on paper. Paper has x to the right and y down, both in mm.
#[derive(Debug, Clone, Copy)]
pub(super) struct Paper {
    scale: f64,
    /// Upper left corner of the box, in the part's frame.
    corner: Point2<f64>,
    /// The same corner on paper.
    margin: Vector2<f64>,
}

impl Paper {
    /// The box with this upper left corner, put at a place on the paper.
    pub(super) fn new(scale: f64, corner: Point2<f64>, margin: Vector2<f64>) -> Self {
        Self { scale, corner, margin }
    }

    /// A length of the part, mm on paper.
    pub(super) fn length(&self, mm: f64) -> f64 {
        mm * self.scale
    }

    /// A point of the part.
    pub(super) fn at(&self, p: Point2<f64>) -> Point2<f64> {
        let off = (p - self.corner) * self.scale;
        Point2::new(self.margin.x + off.x, self.margin.y - off.y)
    }

    /// A direction of the part.
    pub(super) fn toward(v: Vector2<f64>) -> Vector2<f64> {
        Vector2::new(v.x, -v.y)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn scales_are_of_the_row_and_fit() {
        for (most, word) in [
            (1.0, "1:1"),
            (0.999, "1:1.25"),
            (0.34, "1:3"),
            (0.19, "1:6"),
            (7.0, "6:1"),
            (12.6, "12.5:1"),
            (0.0126, "1:80"),
        ] {
            let scale = scale_below(most);
            assert!(scale <= most * (1.0 + 1e-9) && scale > most * 0.7, "{most}: {scale}");
            assert_eq!(scale_word(scale), word, "{most}");
        }
        for odd in [0.0, f64::NAN, f64::INFINITY, -1.0] {
            assert!(scale_below(odd) > 0.0);
        }
        assert!((round_length(47.0) - 20.0).abs() < 1e-12 && (round_length(0.5) - 0.5).abs() < 1e-15);
    }
}
