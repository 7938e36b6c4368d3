//! What the sheet says in words: loads, mass, assumptions.

use crate::command::reading::{drive, hand, ratio};
use crate::file::KeptDensity;
use crate::hand::{FingerCount, Hand};
use crate::mechanics::LoadCase;
use crate::part::{Part, material};
use crate::search::{Scene, TorqueScale};

/// A value with no more decimals than it has, four at most.
pub(super) fn given(value: f64) -> String {
    let text = format!("{value:.4}");
    let text = text.trim_end_matches('0').trim_end_matches('.');
    if text == "-0" { "0".to_owned() } else { text.to_owned() }
}

/// A mass in kg, or in g where it is small.
fn kg(value: f64) -> String {
    if value >= 1.0 { format!("{value:.3} kg") } else { format!("{:.1} g", value * 1e3) }
}

fn is_nought(v: [f64; 3]) -> bool {
    v.iter().all(|x| *x == 0.0)
}

fn vector(v: [f64; 3]) -> String {
    format!("({})", v.map(given).join(", "))
}

/// Where a vector points: along an axis, or by its components.
fn toward(v: [f64; 3]) -> String {
    match v {
        [x, y, z] if y == 0.0 && z == 0.0 => if x > 0.0 { "+x" } else { "-x" }.to_owned(),
        [x, y, z] if x == 0.0 && z == 0.0 => if y > 0.0 { "+y" } else { "-y" }.to_owned(),
        [x, y, z] if x == 0.0 && y == 0.0 => if z > 0.0 { "+z" } else { "-z" }.to_owned(),
        v => vector(v),
    }
}

/// The size of a vector along an axis with that axis, or all three components.
fn along(v: [f64; 3], unit: &str) -> String {
    let toward = toward(v);
    if toward.starts_with('(') {
        format!("{toward} {unit}")
    } else {
        format!("{} {unit} {toward}", given(v.iter().map(|x| x.abs()).sum()))
    }
}

/// Everything a load case is made of.
pub(super) fn load(case: &LoadCase) -> String {
    let mut told = Vec::new();
    told.push(if is_nought(case.gravity) {
        "no weight".to_owned()
    } else {
        format!("weight {}", toward(case.gravity))
    });
    if !is_nought(case.acceleration_m_s2) {
        told.push(format!("accelerated {}", along(case.acceleration_m_s2, "m/s2")));
    }
    if case.any_direction_m_s2 != 0.0 {
        told.push(format!("{} m/s2 in any direction of the plane", given(case.any_direction_m_s2)));
    }
    if case.angular_acceleration_rad_s2 != 0.0 {
        told.push(format!("{} rad/s2 about z", given(case.angular_acceleration_rad_s2)));
    }
    if !is_nought(case.force_n) {
        told.push(format!("{} at {} mm", along(case.force_n, "N"), vector(case.at_mm)));
    }
    told.push(format!("S {}", given(case.safety)));
    if case.squeeze_left < 1.0 {
        told.push(format!("{} % of the squeeze left", given(case.squeeze_left * 100.0)));
    }
    told.join(", ")
}

/// Size, material and mass.
pub(super) fn part(part: &Part) -> String {
    let (low, high) = part.outline().bounds();
    let size = high - low;
    let mut told = format!("{} x {}", given(size.x), given(size.y));
    if let Some(thickness) = part.thickness_mm() {
        told.push_str(&format!(" x {}", given(thickness)));
    }
    told.push_str(" mm");
    if let Some(material) = part.material() {
        told.push_str(&format!(", {material}"));
    }
    if let Some(mass) = part.mass() {
        told.push_str(&format!(", {}", kg(mass.kg)));
    }
    told
}

/// The mass and where it comes from. A part keeps no trace of the key that gave its mass, so the density of the table is
/// named where it gives just this mass, and the part file everywhere else.
pub(super) fn mass(part: &Part, chosen: Option<&KeptDensity>) -> String {
    let Some(mass) = part.mass() else { return "no mass is known".to_owned() };
    let own = kg(mass.kg);
    if let Some(KeptDensity { of, kg_m3 }) = chosen {
        return format!("mass {own}: {} kg/m3 of {of}, chosen when the grasp was saved", given(*kg_m3));
    }
    let row = part.material().and_then(material::density);
    let by_table = row.and_then(|row| Some((row, part.with_density(row.name, row.kg_m3)?.mass()?.kg)));
    match by_table {
        Some((row, kg)) if (kg - mass.kg).abs() <= 1e-9 * mass.kg => {
            format!("mass {own}: {} kg/m3 of {} ({})", given(row.kg_m3), row.name, row.source)
        }
        _ => format!("mass {own}, as the part file gives it"),
    }
}

/// Everything assumed of a grasp of so many fingers, a line each.
pub(super) fn assumed(scene: &Scene, fingers: usize, chosen: Option<&KeptDensity>) -> Vec<String> {
    let setup = scene.setup();
    // A grasp may have been made of fewer or more fingers than the setup goes on to rank.
    let own = Hand { fingers: FingerCount::new(fingers).unwrap_or(setup.hand.fingers), ..setup.hand };
    let scale = match setup.search.torque_scale {
        TorqueScale::Reach => "reach, to the farthest point of the outline",
        TorqueScale::Gyration => "radius of gyration",
        TorqueScale::Mm(_) => "as set",
    };
    let cones = match scene.part().thickness_mm() {
        Some(_) => {
            let bite = given(setup.hand.bite_for(scene.part().thickness_mm()));
            format!("friction cones in space as pyramids of {} sides; bite {bite} mm", setup.search.cone_sides)
        }
        None => "all in the plane: no thickness is known".to_owned(),
    };
    let friction = &setup.friction;
    let condition = friction.condition.map_or(String::new(), |condition| format!(", {}", condition.word()));
    let source = match friction.source.as_deref().map(str::trim) {
        Some(source) if !source.is_empty() => format!("source: {source}"),
        _ => "NO SOURCE is given".to_owned(),
    };
    let limit = setup.hand.force_limit_n.map_or("no force limit".to_owned(), |n| format!("limit {} N each", given(n)));
    vec![
        "rigid bodies, dry friction, first-order statics".to_owned(),
        format!("{}; {limit}; {}", hand(&own), drive(setup.hand.drive)),
        cones,
        format!("torque counts over {:.2} mm ({scale})", scene.frame().scale_mm),
        mass(scene.part(), chosen),
        format!("mu {}{condition}; {source}", ratio(friction.mu)),
    ]
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_load_is_told_with_all_it_has() {
        let case = LoadCase {
            acceleration_m_s2: [0.0, 0.0, 3.0],
            force_n: [1.0, -6.0, 0.0],
            at_mm: [40.0, 0.0, -1.5],
            safety: 2.0,
            squeeze_left: 0.35,
            ..LoadCase::default()
        };
        let told = "weight -z, accelerated 3 m/s2 +z, (1, -6, 0) N at (40, 0, -1.5) mm, S 2, 35 % of the squeeze left";
        assert_eq!(load(&case), told);
        let still = LoadCase { gravity: [0.0; 3], any_direction_m_s2: 8.0, ..LoadCase::default() };
        assert_eq!(load(&still), "no weight, 8 m/s2 in any direction of the plane, S 1");
    }
}
