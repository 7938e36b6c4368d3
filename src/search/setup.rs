//! The setup: friction, hand, search settings, floors and loads under which grasps are scored, and its checks.

use crate::hand::{Closing, Hand, Tip};
use crate::mechanics::spatial::{MOST_SIDES, Pyramid};
use crate::mechanics::{FrictionBand, LoadCase};
use crate::part::{MU_LARGEST, Part};

/// What the torque is divided by to stand beside a force.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum TorqueScale {
    /// Distance from the centre of mass to the farthest point of the outer ring.
    Reach,
    /// Radius of gyration about the centre of mass.
    Gyration,
    /// A length in mm.
    Mm(f64),
}

impl TorqueScale {
    /// The length in mm for a part.
    pub fn mm(self, part: &Part) -> f64 {
        match self {
            Self::Reach => part.reach_mm(),
            Self::Gyration => part.gyration_mm(),
            Self::Mm(mm) => mm,
        }
    }
}

/// How candidates are made.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct SearchSettings {
    /// Largest distance between neighbouring sites on a stretch, mm; perimeter / 200 when absent.
    pub spacing_mm: Option<f64>,
    /// Candidate sets looked at before sampling takes over.
    pub budget: u64,
    /// Seed of the sampler.
    pub seed: u64,
    /// Torque scale.
    pub torque_scale: TorqueScale,
    /// Sides of the pyramid that stands in for a friction cone in space; even.
    pub cone_sides: usize,
}

impl Default for SearchSettings {
    fn default() -> Self {
        Self { spacing_mm: None, budget: 2_000_000, seed: 1, torque_scale: TorqueScale::Reach, cone_sides: 8 }
    }
}

impl SearchSettings {
    /// Spacing in mm for a part.
    pub fn spacing_for(&self, part: &Part) -> f64 {
        self.spacing_mm.unwrap_or(part.outline().perimeter_mm() / 200.0)
    }
}

/// Grasps below any of these are not listed.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Floors {
    /// Least quality.
    pub quality: f64,
    /// Least friction margin.
    pub friction_margin: f64,
    /// Least placement tolerance, mm.
    pub placement_mm: f64,
    /// Least load margin.
    pub load_margin: f64,
}

impl Default for Floors {
    fn default() -> Self {
        Self { quality: 0.0, friction_margin: 1.0, placement_mm: 0.0, load_margin: 1.0 }
    }
}

/// Everything but the part.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct Setup {
    /// Friction of the tips on the part.
    pub friction: FrictionBand,
    /// The hand.
    pub hand: Hand,
    /// How candidates are made.
    pub search: SearchSettings,
    /// What is not listed.
    pub floors: Floors,
    /// Load cases.
    pub loads: Vec<LoadCase>,
}

/// A setting that cannot be.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
#[error("`{key}` is {value}: {mend}")]
pub struct SetupFault {
    /// Table and key, as in the setup file, for example `friction.mu`; `load.2.safety` for the third load.
    pub key: String,
    /// The value.
    pub value: String,
    /// What to do.
    pub mend: String,
}

/// Most load cases a setup may hold.
const MOST_LOADS: usize = 64;

impl Setup {
    /// Every fault of the values together with a part: what its thickness and mass do not allow.
    pub fn faults_with(&self, part: &Part) -> Vec<SetupFault> {
        let mut faults = Checks(Vec::new());
        if let (Some(bite), Some(thickness)) = (self.hand.bite_mm, part.thickness_mm())
            && bite > thickness
        {
            faults.note("hand.bite_mm", bite, format!("the part is {thickness} mm thick; give no more than that"));
        }
        if let TorqueScale::Mm(mm) = self.search.torque_scale {
            let least = part.reach_mm() * LEAST_SCALE;
            if mm < least {
                let mend = format!("the part reaches {:.4} mm; give at least {least:.1e} mm", part.reach_mm());
                faults.note("search.torque_scale", mm, mend);
            }
        }
        for (number, load) in self.loads.iter().enumerate() {
            let name = &load.name;
            if load.needs_mass() && part.mass().is_none() {
                faults.note(
                    &format!("load.{number}"),
                    format!("\"{name}\""),
                    "it moves a mass, and the part has none: give the part `mass_kg`, or `thickness` and a `material` or \
                     `density_kg_m3`"
                        .into(),
                );
            }
            if part.thickness_mm().is_none()
                && let Some(key) = load.out_of_plane()
            {
                let value = match key {
                    "gravity" => load.gravity,
                    "acceleration_m_s2" => load.acceleration_m_s2,
                    "force_n" => load.force_n,
                    _ => load.at_mm,
                };
                faults.note(
                    &format!("load.{number}.{key}"),
                    format!("{value:?}"),
                    "it points out of the plane of a part without a thickness: give the part `thickness`, or keep the load in \
                     the plane (gravity = [0, 0, 0] for none)"
                        .into(),
                );
            }
        }
        faults.0
    }

    /// Every fault of the values by themselves; empty when the setup can be used.
    pub fn faults(&self) -> Vec<SetupFault> {
        let mut faults = Checks(Vec::new());
        self.check_friction(&mut faults);
        self.check_hand(&mut faults);
        self.check_search(&mut faults);
        self.check_loads(&mut faults);
        faults.0
    }

    fn check_friction(&self, faults: &mut Checks) {
        let f = &self.friction;
        faults.range("friction.mu", f.mu, 0.0, MU_LARGEST);
        for (key, value) in [
            ("friction.low", f.low),
            ("friction.nominal", f.nominal),
            ("friction.high", f.high),
            ("friction.sliding", f.sliding),
        ] {
            if let Some(value) = value {
                faults.range(key, value, 0.0, MU_LARGEST);
            }
        }
        if let Some(sliding) = f.sliding
            && sliding > f.mu
        {
            faults.note("friction.sliding", sliding, format!("sliding friction is never above `mu` ({})", f.mu));
        }
        for (low, high, key) in [
            (f.low, f.nominal, "friction.nominal"),
            (f.nominal, f.high, "friction.high"),
            (f.low, f.high, "friction.high"),
        ] {
            if let (Some(low), Some(high)) = (low, high)
                && high < low
            {
                faults.note(
                    key,
                    high,
                    format!("the band must rise from low to nominal to high; {low} stands before it"),
                );
                break;
            }
        }
    }

    fn check_hand(&self, faults: &mut Checks) {
        let h = &self.hand;
        faults.range("hand.pin_radius_mm", h.pin_radius_mm, 0.0, LONGEST_MM);
        faults.above("hand.pad_width_mm", h.pad_width_mm, LONGEST_MM);
        faults.range("hand.pad_depth_mm", h.pad_depth_mm, 0.0, LONGEST_MM);
        if let Some(bite) = h.bite_mm {
            faults.above("hand.bite_mm", bite, LONGEST_MM);
        }
        if h.closing == Closing::Parallel {
            if h.tip != Tip::Pad {
                faults.note("hand.tip", "pin", "parallel closing takes pads: set it to \"pad\"".into());
            }
            if h.fingers.get() != 2 {
                faults.note("hand.fingers", h.fingers.get(), "parallel closing takes two pads: set it to 2".into());
            }
        }
        faults.range("hand.corner_clearance_mm", h.corner_clearance_mm, 0.0, LONGEST_MM);
        faults.range("hand.gap_mm", h.gap_mm, 0.0, LONGEST_MM);
        if let Some(limit) = h.force_limit_n {
            faults.above("hand.force_limit_n", limit, 1e9);
        }
        let [least, most] = h.opening_mm;
        if !(least.is_finite() && most.is_finite() && 0.0 <= least && least < most) {
            faults.note(
                "hand.opening_mm",
                format!("[{least}, {most}]"),
                "give the smallest, then a larger largest distance, both from 0 up".into(),
            );
        }
    }

    fn check_search(&self, faults: &mut Checks) {
        let s = &self.search;
        if let Some(spacing) = s.spacing_mm {
            faults.above("search.spacing_mm", spacing, LONGEST_MM);
        }
        if !(1..=LARGEST_BUDGET).contains(&s.budget) {
            faults.note("search.budget", s.budget, format!("give a number from 1 to {LARGEST_BUDGET}"));
        }
        if let TorqueScale::Mm(mm) = s.torque_scale {
            faults.above("search.torque_scale", mm, LONGEST_MM);
        }
        if Pyramid::new(s.cone_sides).is_none() || s.cone_sides < 4 {
            faults.note("search.cone_sides", s.cone_sides, format!("give an even number from 4 to {MOST_SIDES}"));
        }
        faults.range("floors.quality", self.floors.quality, 0.0, 1e9);
        faults.range("floors.friction_margin", self.floors.friction_margin, 0.0, 1e9);
        faults.range("floors.placement_mm", self.floors.placement_mm, 0.0, LONGEST_MM);
        faults.range("floors.load_margin", self.floors.load_margin, 0.0, 1e9);
    }

    fn check_loads(&self, faults: &mut Checks) {
        if self.loads.len() > MOST_LOADS {
            faults.note("load", format!("{} cases", self.loads.len()), format!("at most {MOST_LOADS} are taken"));
        }
        for (number, load) in self.loads.iter().enumerate().take(MOST_LOADS) {
            let key = |name: &str| format!("load.{number}.{name}");
            for (name, values) in [
                ("gravity", load.gravity),
                ("acceleration_m_s2", load.acceleration_m_s2),
                ("force_n", load.force_n),
                ("at_mm", load.at_mm),
            ] {
                if !values.iter().all(|v| v.is_finite() && v.abs() <= 1e9) {
                    faults.note(&key(name), format!("{values:?}"), "give three finite numbers".into());
                }
            }
            faults.range(&key("angular_acceleration_rad_s2"), load.angular_acceleration_rad_s2, -1e9, 1e9);
            faults.range(&key("any_direction_m_s2"), load.any_direction_m_s2, 0.0, 1e9);
            faults.above(&key("safety"), load.safety, 1e6);
            faults.above(&key("squeeze_left"), load.squeeze_left, 1.0);
        }
    }
}

/// Largest budget: half an hour's work for one core.
const LARGEST_BUDGET: u64 = 10_000_000_000;
/// Least torque scale taken, as a part of the reach: below, torques drown forces and no digits are left.
const LEAST_SCALE: f64 = 1e-4;
/// Longest length taken for a setting, mm.
const LONGEST_MM: f64 = 1e9;

struct Checks(Vec<SetupFault>);

impl Checks {
    fn note(&mut self, key: &str, value: impl ToString, mend: String) {
        self.0.push(SetupFault { key: key.to_owned(), value: value.to_string(), mend });
    }

    fn range(&mut self, key: &str, value: f64, low: f64, high: f64) {
        if !(low..=high).contains(&value) {
            self.note(key, value, format!("give a number from {low} to {high}"));
        }
    }

    fn above(&mut self, key: &str, value: f64, high: f64) {
        if !(value > 0.0 && value <= high) {
            self.note(key, value, format!("give a number above 0 (at most {high})"));
        }
    }
}
