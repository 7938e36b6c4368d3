//! A bracketing root finder.

/// Narrows a bracket around the place where `f` turns positive to `width` and returns its ends: `f` is not above
/// 0 at the lower, and above 0 at the upper.
///
/// The ITP method (Oliveira & Takahashi 2020): never more steps than bisection plus one, and far fewer where `f` is
/// smooth; a jump does no harm.
pub(super) fn bracket(f: impl Fn(f64) -> f64, low: (f64, f64), high: (f64, f64), width: f64) -> (f64, f64) {
    let (mut low, mut at_low) = (low.0, low.1.max(STEEPEST));
    let (mut high, mut at_high) = high;
    let whole = high - low;
    let half_width = width / 2.0;
    let steps = (whole / width).log2().ceil().max(0.0) + 1.0;
    for step in 0..=steps as i32 {
        let span = high - low;
        if span <= width {
            break;
        }
        let middle = low + span / 2.0;
        let chord = (at_high * low - at_low * high) / (at_high - at_low);
        let toward = (middle - chord).signum();
        let shift = 0.2 / whole * span * span;
        let trial = if shift <= (middle - chord).abs() { chord + toward * shift } else { middle };
        let leash = half_width * (steps - f64::from(step)).exp2() - span / 2.0;
        let at = if (trial - middle).abs() <= leash { trial } else { middle - toward * leash };
        let value = f(at);
        if value > 0.0 {
            (high, at_high) = (at, value);
        } else {
            (low, at_low) = (at, value.max(STEEPEST));
        }
    }
    (low, high)
}

/// Values below this say no more than that the root is far; without a floor they would flatten the chord.
const STEEPEST: f64 = -1.0;
