use holdwright::mechanics::*;
use nalgebra::{Point2, Vector2};
fn c(px: f64, py: f64, nx: f64, ny: f64, mu: f64) -> Contact {
    Contact { point: Point2::new(px, py), normal: Vector2::new(nx, ny), mu }
}
#[test]
fn quick() {
    let frame = Frame { about: Point2::origin(), scale_mm: 1.0 };
    for mu in [0.1, 0.2, 0.3, 0.5, 1.0] {
        let w = Wrenches::new(&[c(-1., 0., 1., 0., mu), c(1., 0., -1., 0., mu)], &frame);
        let a = Assessment::of(&w, &frame, mu, &[9., 9.]);
        println!(
            "{mu} {:?} {} {} need {:?} {:?} pl {} doubts {:?}",
            a.verdict,
            a.quality,
            a.quality_per_finger,
            a.friction_needed,
            a.friction_margin_deg,
            a.placement.mm,
            a.doubts(&w, &frame, mu)
        );
        let tri: Vec<_> = (0..3)
            .map(|i| {
                let t = i as f64 * 2.0943951023931953;
                c(t.cos(), t.sin(), -t.cos(), -t.sin(), mu)
            })
            .collect();
        let w = Wrenches::new(&tri, &frame);
        let a = Assessment::of(&w, &frame, mu, &[9., 9., 9.]);
        println!(
            "   tri {:?} {} {} need {:?}  pl {} doubts {:?}",
            a.verdict,
            a.quality,
            a.quality_per_finger,
            a.friction_needed,
            a.placement.mm,
            a.doubts(&w, &frame, mu)
        );
    }
    let f = Frame { about: Point2::new(0.3, 0.0), scale_mm: 1.0 };
    for (about, want) in [((0.3, 0.), 0.291606), ((0., 0.4), 0.298275), ((2., 1.), 0.142857)] {
        let f = Frame { about: Point2::new(about.0, about.1), ..f };
        let w = Wrenches::new(&[c(-1., 0., 1., 0., 0.5), c(1., 0., -1., 0., 0.5)], &f);
        println!("{} {want}", quality::planar(&w).signed_quality);
    }
    // pinwheel
    for (e1, e2) in [(0.25, 0.25), (0.5, 0.25), (0., 0.), (0.25, -0.25)] {
        let w = Wrenches::new(
            &[c(-1., e1, 1., 0., 0.), c(1., -e1, -1., 0., 0.), c(e2, -1., 0., 1., 0.), c(-e2, 1., 0., -1., 0.)],
            &frame,
        );
        let a = Assessment::of(&w, &frame, 0.0, &[9.; 4]);
        println!(
            "pin {e1} {e2} {:?} {} esc {:?} doubts {:?} need {:?}",
            a.verdict,
            a.quality,
            a.escape,
            a.doubts(&w, &frame, 0.0),
            a.friction_needed
        );
    }
    // L plate pins
    let f = Frame { about: Point2::new(44., 44.), scale_mm: 87.817994 };
    let w = Wrenches::new(&[c(80., 0., 0., 1., 0.25), c(80., 40., 0., -1., 0.25)], &f);
    let a = Assessment::of(&w, &f, 0.25, &[9.; 2]);
    println!("L {} {} (.046976 .092198)", a.quality, a.quality_per_finger);
    // timing
    let tri: Vec<_> = (0..6)
        .map(|i| {
            let t = i as f64 * 1.03;
            c(t.cos(), t.sin() * 0.9, -t.cos(), -t.sin(), 0.4)
        })
        .collect();
    for k in [3, 4, 6] {
        let w = Wrenches::new(&tri[..k], &frame);
        let t = std::time::Instant::now();
        let mut s = 0.0;
        for _ in 0..100000 {
            s += quality::planar(std::hint::black_box(&w)).signed_quality;
        }
        let k1 = t.elapsed().as_nanos() / 100000;
        let t = std::time::Instant::now();
        for _ in 0..10000 {
            s += quality::by_definition(std::hint::black_box(w.generators())).signed_quality;
        }
        let k2 = t.elapsed().as_nanos() / 10000;
        let t = std::time::Instant::now();
        for _ in 0..10000 {
            s += friction::factor_needed(std::hint::black_box(w.levers()), w.mus()).unwrap_or(0.0);
        }
        println!("k {k} kernel {k1} ns, definition {k2} ns, friction {} ns {s}", t.elapsed().as_nanos() / 10000);
    }
}
#[test]
fn ranking() {
    use holdwright::part::*;
    use holdwright::search::*;
    use std::sync::Arc;
    let mut ring = vec![];
    for i in 0..12 {
        let a = i as f64 * std::f64::consts::TAU / 12.0;
        let r = 50.0 + 13.0 * ((i * 7 % 5) as f64) / 5.0;
        ring.push([r * a.cos(), r * a.sin()]);
    }
    for (key, listing) in [
        (Key::Quality, Listing::Families),
        (Key::Quality, Listing::Members),
        (Key::Friction, Listing::Families),
        (Key::Placement, Listing::Families),
        (Key::QualityPerFinger, Listing::Families),
    ] {
        for (k, budget) in [(2, 2_000_000), (3, 2_000_000), (4, 2_000_000)] {
            let part = Arc::new(Part::new(PartDescription::bare("x", vec![ring.clone()])).unwrap());
            let mut setup = Setup::default();
            setup.hand.fingers = holdwright::hand::FingerCount::new(k).unwrap();
            setup.search.budget = budget;
            let scene = Scene::new(part, setup).unwrap();
            let mut out = vec![];
            for threads in [1, 2] {
                let pool = rayon::ThreadPoolBuilder::new().num_threads(threads).build().unwrap();
                let t = std::time::Instant::now();
                let r = pool.install(|| rank(&scene, key, listing, 20, &Cancel::default(), &|_| ())).unwrap();
                let best = &r.grasps[0];
                println!(
                    "{key:?} {listing:?} k{k} threads {threads} {:?} sites {} examined {} closed {} inc {} compl {} fam {} best q {} need {:?} pl {} fam {:?}",
                    t.elapsed(),
                    r.sites,
                    r.examined,
                    r.closed,
                    r.inconclusive,
                    r.complete,
                    r.families,
                    best.assessment.quality,
                    best.assessment.friction_needed,
                    best.assessment.placement.mm,
                    best.family
                );
                out.push(r);
            }
            assert_eq!(out[0], out[1]);
        }
    }
}
