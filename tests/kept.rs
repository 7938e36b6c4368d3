//! Fingers that a ranking keeps where they are: the sampler against its own full list, the proof against dense attacks.
//!
//! Derived: keeping a finger leaves exactly those candidate sets that have it, so the list with it kept is the full list with
//! the others struck out, and the best with it kept is the best of those that have it.
#![allow(clippy::unwrap_used, reason = "a test that cannot go on has failed")]

mod common;

use common::{Dice, assert_close, bracket};
use holdwright::hand::{Closing, FingerCount, Tip};
use holdwright::mechanics::{MARGINAL, quality};
use holdwright::part::{EdgeId, Part};
use holdwright::search::{Cancel, Key, Listing, Ranking, Scene, Setup, Spot, Wanted, rank, sample};
use std::sync::Arc;

fn setup(fingers: usize) -> Setup {
    let mut setup = Setup::default();
    setup.hand.fingers = FingerCount::new(fingers).unwrap();
    setup.hand.gap_mm = 2.0;
    setup.hand.pin_radius_mm = 1.0;
    setup.friction.mu = 0.3;
    setup.search.spacing_mm = Some(18.0);
    setup
}

fn members(scene: &Scene, key: Key) -> Ranking {
    sample(scene, key, Listing::Members, 1_000_000, &Cancel::default(), &|_| ()).unwrap()
}

/// Places of a grasp, in an order that does not depend on how they were found.
fn sorted(spots: &[Spot]) -> Vec<(usize, usize, i64)> {
    let micrometres = |spot: &Spot| (spot.edge.ring, spot.edge.edge, (spot.along_mm * 1e3).round() as i64);
    let mut all: Vec<_> = spots.iter().map(micrometres).collect();
    all.sort_unstable();
    all
}

#[test]
fn the_sampler_lists_what_has_the_finger() {
    let mut dice = Dice::seeded(41);
    for fingers in [2, 3, 4] {
        let part = Arc::new(Part::new(bracket()).unwrap());
        let mut setup = setup(fingers);
        setup.search.spacing_mm = Some(if fingers == 4 { 30.0 } else { 15.0 });
        let free = Scene::new(Arc::clone(&part), setup.clone()).unwrap();
        let all = members(&free, Key::Quality);
        assert!(all.complete && all.grasps.len() > 10, "{}", all.grasps.len());
        for keep in 1..=fingers.min(3) {
            let some = &all.grasps[dice.pick(all.grasps.len())];
            let kept = &some.grasp.spots[..keep];
            let scene = Scene::keeping(Arc::clone(&part), setup.clone(), kept).unwrap();
            let with = members(&scene, Key::Quality);
            let has = |spots: &[Spot]| sorted(kept).iter().all(|one| sorted(spots).contains(one));
            let mut expected: Vec<_> = all.grasps.iter().map(|g| sorted(&g.grasp.spots)).collect();
            let is_there: Vec<bool> = all.grasps.iter().map(|g| has(&g.grasp.spots)).collect();
            let mut keep_it = is_there.iter();
            expected.retain(|_| *keep_it.next().unwrap());
            expected.sort();
            let mut found: Vec<_> = with.grasps.iter().map(|g| sorted(&g.grasp.spots)).collect();
            found.sort();
            assert_eq!(found, expected, "{fingers} fingers, {keep} kept");
            for row in &with.grasps {
                assert_eq!(&row.grasp.spots[..keep], kept, "kept fingers come first");
                // Room counts to the ends of the real stretch, not to the kept position.
                let free_row = all.grasps.iter().find(|g| sorted(&g.grasp.spots) == sorted(&row.grasp.spots)).unwrap();
                assert_close(row.assessment.placement.mm, free_row.assessment.placement.mm, 1e-9, 1e-9);
            }
        }
    }
}

#[test]
fn a_sample_beyond_the_budget_keeps_them_too() {
    let part = Arc::new(Part::new(bracket()).unwrap());
    for (fingers, budget) in [(3, 300), (5, 2000)] {
        let mut setup = setup(fingers);
        let free = Scene::new(Arc::clone(&part), setup.clone()).unwrap();
        let kept = members(&free, Key::Quality).grasps[0].grasp.spots[..2].to_vec();
        setup.search.budget = budget;
        setup.search.spacing_mm = Some(1.0);
        let scene = Scene::keeping(Arc::clone(&part), setup, &kept).unwrap();
        let some = members(&scene, Key::Quality);
        assert!(!some.complete && !some.grasps.is_empty());
        assert!(some.grasps.iter().all(|row| row.grasp.spots[..2] == kept[..]));
    }
}

#[test]
fn the_proof_keeps_them_and_nothing_with_them_beats_its_bound() {
    let part = Arc::new(Part::new(bracket()).unwrap());
    let mut dice = Dice::seeded(5);
    for fingers in [2, 3, 4] {
        let setup = setup(fingers);
        let free = Scene::new(Arc::clone(&part), setup.clone()).unwrap();
        let whole = rank(&free, &Wanted::families(Key::Quality, 1), &Cancel::default(), &|_| ()).unwrap();
        for _ in 0..3 {
            let stretch = free.stretches()[dice.pick(free.stretches().len())];
            let kept = [Spot { edge: stretch.edge, along_mm: dice.even(stretch.from_mm, stretch.to_mm) }];
            let scene = Scene::keeping(Arc::clone(&part), setup.clone(), &kept).unwrap();
            let ranking = rank(&scene, &Wanted::families(Key::Quality, 5), &Cancel::default(), &|_| ()).unwrap();
            let proof = ranking.proof.unwrap();
            let Some(bound) = proof.best_bound else { continue };
            assert!(ranking.grasps.iter().all(|row| row.grasp.spots[0] == kept[0]));
            let sampled = members(&scene, Key::Quality);
            if let (Some(best), Some(sampled)) = (ranking.grasps.first(), sampled.grasps.first()) {
                assert!(best.assessment.quality >= sampled.assessment.quality - 1e-9);
                assert!(best.assessment.quality <= whole.proof.unwrap().best_bound.unwrap() + 1e-9);
            }
            for _ in 0..1500 {
                let mut spots = kept.to_vec();
                while spots.len() < fingers {
                    let on = free.stretches()[dice.pick(free.stretches().len())];
                    spots.push(Spot { edge: on.edge, along_mm: dice.even(on.from_mm, on.to_mm) });
                }
                let grasp = scene.grasp(&spots).unwrap();
                // The plain definition (Ferrari & Canny 1992), without the kernel.
                let quality = quality::by_definition(scene.wrenches(&grasp).generators()).signed_quality;
                assert!(!grasp.fits() || quality <= MARGINAL || quality <= bound + 1e-9, "{quality} {bound} {spots:?}");
            }
        }
    }
}

#[test]
fn what_cannot_be_kept_is_told() {
    let part = Arc::new(Part::new(bracket()).unwrap());
    let free = Scene::new(Arc::clone(&part), setup(2)).unwrap();
    let stretch = free.stretches()[0];
    let spot = |along_mm| Spot { edge: stretch.edge, along_mm };
    let three = [spot(stretch.from_mm), spot(stretch.to_mm), spot(stretch.from_mm + 1.0)];
    let told = |setup: Setup, kept: &[Spot]| Scene::keeping(Arc::clone(&part), setup, kept).unwrap_err().to_string();
    assert!(told(setup(2), &three).contains("3 of 2: unlock one"), "{}", told(setup(2), &three));
    assert!(
        told(setup(3), &[Spot { edge: EdgeId { ring: 0, edge: 1 }, along_mm: 15.0 }])
            .contains("no finger of this hand fits there")
    );
    let mut jaws = setup(2);
    (jaws.hand.closing, jaws.hand.tip) = (Closing::Parallel, Tip::Pad);
    assert!(told(jaws, &[spot(stretch.from_mm)]).contains("parallel jaws"));
}
