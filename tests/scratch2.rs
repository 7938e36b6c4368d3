//! x
use holdwright::part::*;
use holdwright::search::*;
use std::sync::Arc;
#[test]
fn large() {
    for n in [400usize, 5000, 100_000, 200_000] {
        let ring: Vec<[f64; 2]> = (0..n)
            .map(|i| {
                let a = i as f64 * std::f64::consts::TAU / n as f64;
                let r = 50.0 + 5.0 * (7.0 * a).cos();
                [1e6 + r * a.cos(), r * a.sin()]
            })
            .collect();
        let t = std::time::Instant::now();
        let part = Arc::new(Part::new(PartDescription::bare("x", vec![ring])).unwrap());
        let t1 = t.elapsed();
        for r in [0.0, 3.0] {
            let mut setup = Setup::default();
            setup.hand.pin_radius_mm = r;
            let t = std::time::Instant::now();
            let scene = Scene::new(part.clone(), setup).unwrap();
            let t2 = t.elapsed();
            let t = std::time::Instant::now();
            let r = rank(&scene, Key::Quality, Listing::Families, 20, &Cancel::default(), &|_| ()).unwrap();
            println!(
                "n {n} part {t1:?} scene {t2:?} rank {:?} sites {} examined {} closed {} fam {} compl {} rows {} best {:?}",
                t.elapsed(),
                r.sites,
                r.examined,
                r.closed,
                r.families,
                r.complete,
                r.grasps.len(),
                r.grasps.first().map(|g| g.assessment.quality)
            );
        }
    }
    let hwm = std::fs::read_to_string("/proc/self/status").unwrap();
    println!("{}", hwm.lines().find(|l| l.starts_with("VmHWM")).unwrap());
    // comb
    let n = 50_000;
    let mut ring = vec![];
    for i in 0..n {
        let x = i as f64;
        ring.push([x + 1e5, 1e5]);
        ring.push([x + 0.5, 0.0]);
    }
    ring.push([n as f64 + 2e5, 2e5]);
    ring.push([0.0, 3e5]);
    let t = std::time::Instant::now();
    let p = Part::new(PartDescription::bare("comb", vec![ring]));
    println!("comb {:?} {:?}", t.elapsed(), p.map(|_| ()).map_err(|e| e.0.len()));
}
