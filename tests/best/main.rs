//! The proved best against everything that might beat it: dense random placements, local searches from many starts, the
//! sampler, plain enumeration on fine grids, and cases whose best is known.
#![allow(clippy::unwrap_used, clippy::expect_used, reason = "a test that cannot go on has failed")]

mod attack;
#[path = "../common/mod.rs"]
mod common;
mod known;

use common::{Dice, assert_close, scene};
use holdwright::hand::{Closing, Stretch, Tip};
use holdwright::mechanics::{Assessment, Holding, LoadCase, MARGINAL, Verdict, quality};
use holdwright::part::{ArcDescription, KeepOutDescription, PartDescription};
use holdwright::search::{
    Ask, Cancel, Cancelled, Key, Listing, Proved, Scene, Setup, Spot, TorqueScale, prove, sample,
};
use std::f64::consts::TAU;

fn proved(scene: &Scene, key: Key, want: usize, gap: f64, budget: u64) -> Proved {
    prove(scene, &Ask { key, want, gap, budget, known: &[] }, &Cancel::default(), &|_| ()).unwrap()
}

/// Larger is better, whatever the key.
fn merit(key: Key, value: f64) -> f64 {
    if matches!(key, Key::Friction | Key::Squeeze) { -value } else { value }
}

/// The score of a placement read in full, if a ranking would list it.
fn score(scene: &Scene, key: Key, spots: &[Spot]) -> Option<f64> {
    let grasp = scene.grasp(spots).ok()?;
    if !grasp.fits() {
        return None;
    }
    let wrenches = scene.wrenches(&grasp);
    let holding = scene.holding(&grasp, &wrenches);
    if holding.as_ref().is_some_and(|holding| !holding.held()) {
        return None;
    }
    if key == Key::Quality {
        // The plain definition (Ferrari & Canny 1992), without the kernel.
        let quality = quality::by_definition(wrenches.generators()).signed_quality;
        return (quality > MARGINAL).then_some(quality);
    }
    let mut read = Assessment::of(&wrenches, scene.frame(), scene.setup().friction.mu, &grasp.rooms_mm);
    if read.verdict != Verdict::Closed {
        return None;
    }
    let squeeze = holding.as_ref().and_then(Holding::squeeze_n);
    let margin = holding.as_ref().and_then(Holding::load_margin);
    if let Some(holding) = holding {
        read.hold(holding, &wrenches, scene.setup().friction.mu);
    }
    match key {
        Key::Quality => None,
        Key::QualityPerFinger => Some(read.quality_per_finger),
        Key::Placement => Some(read.placement.mm),
        Key::Friction => read.friction_needed,
        Key::Squeeze => squeeze,
        Key::LoadMargin => margin,
    }
}

/// A flat plate of some weight, lifted and swung.
fn heavy(mut described: PartDescription) -> PartDescription {
    described.thickness = Some(8.0);
    described.mass_kg = Some(0.4);
    described
}

fn loads() -> Vec<LoadCase> {
    let named = |name: &str| LoadCase { name: name.into(), ..LoadCase::default() };
    vec![
        LoadCase { acceleration_m_s2: [0.0, 0.0, 2.5], safety: 1.5, ..named("lift") },
        LoadCase { acceleration_m_s2: [3.0, -5.0, 0.0], ..named("swing") },
    ]
}

/// What every result has to be in itself: scores that the grasps really have, bounds beyond them, a gap that follows.
fn check_rows(scene: &Scene, key: Key, proved: &Proved, gap: f64) {
    for row in &proved.grasps {
        let value = score(scene, key, &row.listed.grasp.spots).expect("a listed grasp is one");
        assert_close(value, row.value, 1e-7, 1e-8);
        assert!(merit(key, row.bound) >= merit(key, row.value) - 1e-12);
        assert!(row.listed.grasp.fits());
    }
    for pair in proved.grasps.windows(2) {
        assert!(merit(key, pair[0].value) >= merit(key, pair[1].value) - 1e-7);
        assert_ne!(pair[0].listed.family, pair[1].listed.family);
    }
    if proved.proved {
        assert!(proved.gap <= gap + 1e-6);
        if let (Some(first), Some(bound)) = (proved.grasps.first(), proved.best_bound) {
            let small = match key {
                Key::Quality | Key::QualityPerFinger => 1e-4,
                Key::Placement => 1e-4 * scene.frame().scale_mm,
                Key::Friction => 1e-2 * scene.setup().friction.mu,
                Key::Squeeze | Key::LoadMargin => 1e-6,
            };
            let over = merit(key, bound) - merit(key, first.value);
            assert!(over <= gap * first.value.abs().max(small) * (1.0 + 1e-6) + 1e-6, "{over}");
        }
    }
}
