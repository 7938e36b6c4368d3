//! The load cases on the bench: made larger or smaller, added, taken out and brought back; put aside while the part lacks
//! what they act on.

use super::action::Action;
use super::knobs;
use super::state::{EntryKind, Layer, State};
use super::update::{self, Effect};
use crate::mechanics::LoadCase;
use crate::part::Part;
use crate::search::{Setup, SetupFault};

/// A load case in the list.
#[derive(Debug, Clone, PartialEq)]
pub struct LoadRow {
    /// The case.
    pub case: LoadCase,
    /// Taken out by the user; it stays in the list and can be brought back.
    pub out: bool,
}

impl LoadRow {
    pub(super) fn new(case: LoadCase) -> Self {
        Self { case, out: false }
    }

    /// Grasps of this part have to hold it.
    pub fn in_force(&self, part: &Part) -> bool {
        !self.out && refusal(&self.case, part).is_none()
    }

    /// Put aside: wanted, but the part lacks what it acts on.
    pub fn aside(&self, part: &Part) -> bool {
        !self.out && refusal(&self.case, part).is_some()
    }
}

/// A setup of one case alone, to have it checked.
fn alone(case: &LoadCase) -> Setup {
    Setup { loads: vec![case.clone()], ..Setup::default() }
}

/// What the part lacks for a case, if anything.
pub(super) fn refusal(case: &LoadCase, part: &Part) -> Option<SetupFault> {
    alone(case).faults_with(part).into_iter().next()
}

/// The cases grasps of a part have to hold, in the list's order.
pub(super) fn in_force(rows: &[LoadRow], part: &Part) -> Vec<LoadCase> {
    rows.iter().filter(|row| row.in_force(part)).map(|row| row.case.clone()).collect()
}

/// How many are put aside on a part.
pub(super) fn aside(rows: &[LoadRow], part: &Part) -> usize {
    rows.iter().filter(|row| row.aside(part)).count()
}

/// Says that cases are put aside and how they come back; nothing when none is.
pub(super) fn told_aside(rows: &[LoadRow], part: &Part) -> Option<String> {
    let count = aside(rows, part);
    let loads = if count == 1 { "1 load aside".to_owned() } else { format!("{count} loads aside") };
    let why = match (part.mass(), part.thickness_mm()) {
        (None, Some(_)) => format!("no mass, {} lists densities", super::action::key_of(Action::OpenMaterials)),
        (None, None) => "no mass, no thickness".to_owned(),
        (Some(_), _) => "no thickness".to_owned(),
    };
    (count > 0).then(|| format!("{loads}: {why}"))
}

/// What of a case + and - change: the first of its motions and forces that is not nought.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Motion {
    Acceleration,
    AnyDirection,
    OutsideForce,
    Turning,
}

fn length(v: [f64; 3]) -> f64 {
    v.iter().fold(0.0, |sum: f64, x| sum.hypot(*x))
}

impl Motion {
    const ALL: [Self; 4] = [Self::Acceleration, Self::AnyDirection, Self::OutsideForce, Self::Turning];

    pub(super) fn of(case: &LoadCase) -> Option<Self> {
        Self::ALL.into_iter().find(|motion| motion.size(case) > 0.0)
    }

    /// What a size typed for a case without any motion sets: a lift against its weight, or a push any way.
    fn first_for(case: &LoadCase) -> Self {
        Self::of(case).unwrap_or(if length(case.gravity) > 0.0 { Self::Acceleration } else { Self::AnyDirection })
    }

    pub(super) fn size(self, case: &LoadCase) -> f64 {
        match self {
            Self::Acceleration => length(case.acceleration_m_s2),
            Self::AnyDirection => case.any_direction_m_s2,
            Self::OutsideForce => length(case.force_n),
            Self::Turning => case.angular_acceleration_rad_s2.abs(),
        }
    }

    pub(super) fn unit(self) -> &'static str {
        match self {
            Self::Acceleration | Self::AnyDirection => "m/s2",
            Self::OutsideForce => "N",
            Self::Turning => "rad/s2",
        }
    }

    /// Gives it another size; its direction stays.
    fn resize(self, case: &mut LoadCase, size: f64) {
        let scaled = |v: [f64; 3]| v.map(|x| x / length(v) * size);
        match self {
            Self::Acceleration if length(case.acceleration_m_s2) > 0.0 => {
                case.acceleration_m_s2 = scaled(case.acceleration_m_s2);
            }
            Self::Acceleration => case.acceleration_m_s2 = scaled(case.gravity).map(|x| 0.0 - x),
            Self::AnyDirection => case.any_direction_m_s2 = size,
            Self::OutsideForce => case.force_n = scaled(case.force_n),
            Self::Turning => case.angular_acceleration_rad_s2 = size.copysign(case.angular_acceleration_rad_s2),
        }
    }
}

/// What is typed for a case, and the value it has now in words.
pub(super) fn size_of(state: &State, row: usize) -> Option<(f64, &'static str)> {
    let case = &state.loads.get(row)?.case;
    let motion = Motion::first_for(case);
    Some((motion.size(case), motion.unit()))
}

/// Takes a changed list and ranks by it.
///
/// # Errors
/// What is wrong with it; the list stays as it was.
fn put(state: &mut State, rows: Vec<LoadRow>) -> Result<Vec<Effect>, String> {
    let cases = in_force(&rows, state.order.scene.part());
    let effects = knobs::turn(state, |setup| setup.loads = cases)?;
    state.loads = rows;
    Ok(effects)
}

/// Changes one case.
fn change(state: &mut State, row: usize, change: impl FnOnce(&mut LoadCase)) -> Result<Vec<Effect>, String> {
    let mut rows = state.loads.clone();
    let Some(own) = rows.get_mut(row) else { return Ok(Vec::new()) };
    change(&mut own.case);
    // Cases out of force are checked too; the list counts from 1, a setup of one case from 0.
    if let Some(fault) = alone(&own.case).faults().first() {
        let key = fault.key.rsplit('.').next().unwrap_or_default();
        return Err(format!("`{key}` would be {}: {}", fault.value, fault.mend));
    }
    put(state, rows)
}

/// Gives a case's motion the size typed.
pub(super) fn resize(state: &mut State, row: usize, size: f64) -> Result<Vec<Effect>, String> {
    if !(size > 0.0 && size.is_finite()) {
        return Err("give a size above 0; x takes the case out".to_owned());
    }
    change(state, row, |case| Motion::first_for(case).resize(case, size))
}

/// Gives a case the safety factor typed.
pub(super) fn set_safety(state: &mut State, row: usize, safety: f64) -> Result<Vec<Effect>, String> {
    change(state, row, |case| case.safety = safety)
}

fn step(state: &mut State, row: usize, up: bool) -> Result<Vec<Effect>, String> {
    let Some(own) = state.loads.get(row) else { return Ok(Vec::new()) };
    match Motion::of(&own.case) {
        Some(motion) => {
            let size = knobs::preferred(motion.size(&own.case), up);
            change(state, row, |case| motion.resize(case, size))
        }
        None => Err("this case is the weight alone: Enter gives it a motion".to_owned()),
    }
}

/// Acceleration of a new case, m/s2, and its safety factor: those of a brisk lift (common practice, no source).
const NEW: (f64, f64) = (3.0, 2.0);

/// A lift off the table where the part has a thickness; where it has none, a lift of the part held upright.
fn lift(state: &State) -> LoadCase {
    let gravity = if state.order.scene.part().thickness_mm().is_some() { [0.0, 0.0, -1.0] } else { [0.0, -1.0, 0.0] };
    let taken = |name: &str| state.loads.iter().any(|row| row.case.name == name);
    let numbered = (2..).map(|number| format!("lift {number}"));
    let name = std::iter::once("lift".to_owned()).chain(numbered).find(|name| !taken(name)).unwrap_or_default();
    let (size, safety) = NEW;
    LoadCase { name, gravity, acceleration_m_s2: gravity.map(|x: f64| 0.0 - x * size), safety, ..LoadCase::default() }
}

fn add(state: &mut State) -> Result<Vec<Effect>, String> {
    let mut rows = state.loads.clone();
    rows.push(LoadRow::new(lift(state)));
    let at = rows.len() - 1;
    let effects = put(state, rows)?;
    state.layers.pop();
    state.layers.push(Layer::Loads { at });
    Ok(effects)
}

fn take_out_or_back(state: &mut State, row: usize) -> Result<Vec<Effect>, String> {
    let mut rows = state.loads.clone();
    let Some(own) = rows.get_mut(row) else { return Ok(Vec::new()) };
    own.out = !own.out;
    let refused = if own.aside(state.order.scene.part()) { refusal(&own.case, state.order.scene.part()) } else { None };
    let effects = put(state, rows)?;
    state.message = refused.map(|fault| format!("still aside: {}", fault.mend));
    Ok(effects)
}

/// Opens the list.
pub(super) fn open(state: &mut State) {
    state.layers.push(Layer::Loads { at: 0 });
}

/// Carries out an action in the list.
pub(super) fn act(state: &mut State, action: Action) -> Vec<Effect> {
    let last = state.loads.len().saturating_sub(1);
    let Some(Layer::Loads { at }) = state.layers.last_mut() else { return Vec::new() };
    *at = (*at).min(last);
    let row = *at;
    let done = match action {
        Action::Down => {
            *at = (row + 1).min(last);
            return Vec::new();
        }
        Action::Up => {
            *at = row.saturating_sub(1);
            return Vec::new();
        }
        Action::Close => {
            state.layers.pop();
            return Vec::new();
        }
        Action::Accept => {
            update::open_entry(state, EntryKind::Size { row });
            return Vec::new();
        }
        Action::Safety => {
            update::open_entry(state, EntryKind::Safety { row });
            return Vec::new();
        }
        Action::Larger => step(state, row, true),
        Action::Smaller => step(state, row, false),
        Action::NewCase => add(state),
        Action::TakeOut => take_out_or_back(state, row),
        _ => return Vec::new(),
    };
    done.unwrap_or_else(|fault| {
        state.message = Some(fault);
        Vec::new()
    })
}
