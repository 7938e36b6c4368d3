//! Wrenches: force and torque about the centre of mass, the torque divided by the torque scale.
//!
//! A contact's cone in the plane has two edges of unit normal force, `n + mu t` and `n - mu t`, exact and not
//! linearised (the unit-normal convention of Ferrari & Canny 1992 with L1 force limits). Its generators are
//! `w = (fx, fy, ((p - c) x f) / l)`: two for a point, four for a pad (both at each end), half of that when mu is 0.

use super::Contact;
use crate::hand::FingerCount;
use nalgebra::{Matrix3xX, Point2, Vector2, Vector3};

/// Most force directions of a grasp: two for each finger.
pub const MOST_DIRECTIONS: usize = 2 * FingerCount::MOST;
/// Most generators of a grasp: four for each finger.
pub const MOST_GENERATORS: usize = 4 * FingerCount::MOST;

/// The frame wrenches are taken in.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Frame {
    /// Torque point (the centre of mass), local frame, mm.
    pub about: Point2<f64>,
    /// Torque scale l, mm: torques stand as tau / l beside forces.
    pub scale_mm: f64,
}

/// A contact seen from the frame: what its generators are made of, at any mu.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Lever {
    /// Unit inward normal.
    pub normal: Vector2<f64>,
    /// Unit tangent, the normal turned by -90 degrees: material lies on its left.
    pub tangent: Vector2<f64>,
    /// Torque of a unit normal force over l.
    pub normal_torque: f64,
    /// Torque of a unit tangential force over l.
    pub tangent_torque: f64,
    /// What the torque of a unit normal force gains or loses over l when it moves to either end of a pad; 0 for a point.
    /// Moving a force along the edge by s adds s times its normal part to the torque and nothing else.
    pub spread: f64,
}

impl Lever {
    /// The lever of a contact at a point with a unit inward normal.
    pub fn new(point: Point2<f64>, normal: Vector2<f64>, frame: &Frame) -> Self {
        let arm = (point - frame.about) / frame.scale_mm;
        let tangent = Vector2::new(normal.y, -normal.x);
        Self { normal, tangent, normal_torque: cross(arm, normal), tangent_torque: cross(arm, tangent), spread: 0.0 }
    }

    /// The lever of a contact.
    pub fn of(contact: &Contact, frame: &Frame) -> Self {
        Self { spread: contact.half_width_mm / frame.scale_mm, ..Self::new(contact.point, contact.normal, frame) }
    }

    /// Torques over l of a force on the cone edge of a signed friction coefficient with a unit normal part: the least and
    /// the largest, from end to end of a pad.
    pub fn torques(&self, mu: f64) -> [f64; 2] {
        let middle = self.normal_torque + mu * self.tangent_torque;
        [middle - self.spread, middle + self.spread]
    }

    /// The cone-edge wrenches at a friction coefficient.
    pub fn generators(&self, mu: f64) -> Generators {
        let mut made = Generators { all: [Vector3::zeros(); 4], count: 0 };
        let sides = [mu, -mu];
        for &m in &sides[..if mu > 0.0 { 2 } else { 1 }] {
            let force = self.normal + self.tangent * m;
            let torques = self.torques(m);
            for &torque in &torques[..if self.spread > 0.0 { 2 } else { 1 }] {
                made.all[made.count] = Vector3::new(force.x, force.y, torque);
                made.count += 1;
            }
        }
        made
    }
}

/// The generators of one contact: one to four, read as a slice.
#[derive(Debug, Clone, Copy)]
pub struct Generators {
    all: [Vector3<f64>; 4],
    count: usize,
}

impl std::ops::Deref for Generators {
    type Target = [Vector3<f64>];

    fn deref(&self) -> &[Vector3<f64>] {
        &self.all[..self.count]
    }
}

/// Plane cross product `a x b = ax by - ay bx`.
///
/// ```
/// use holdwright::mechanics::wrench::cross;
/// use nalgebra::Vector2;
/// assert_eq!(cross(Vector2::new(1.0, 0.0), Vector2::new(0.0, 1.0)), 1.0);
/// ```
pub fn cross(a: Vector2<f64>, b: Vector2<f64>) -> f64 {
    a.x * b.y - a.y * b.x
}

/// The wrench set of a grasp: the one thing every score reads.
#[derive(Debug, Clone, PartialEq)]
pub struct Wrenches {
    levers: Vec<Lever>,
    mus: Vec<f64>,
    /// Curvature of each contact's edge, 1/mm; 0 where it is straight.
    curvatures: Vec<f64>,
    /// Generators, finger after finger.
    generators: Vec<Vector3<f64>>,
    /// Finger of each generator.
    fingers: Vec<usize>,
}

impl Wrenches {
    /// Wrenches of contacts in a frame. Takes at most [`FingerCount::MOST`] contacts; more are a caller's error.
    pub fn new(contacts: &[Contact], frame: &Frame) -> Self {
        assert!(contacts.len() <= FingerCount::MOST, "at most {} contacts", FingerCount::MOST);
        let levers = contacts.iter().map(|contact| Lever::of(contact, frame)).collect();
        Self::from_levers(levers, contacts.iter().map(|c| c.mu).collect())
    }

    fn from_levers(levers: Vec<Lever>, mus: Vec<f64>) -> Self {
        let mut generators = Vec::with_capacity(4 * levers.len());
        let mut fingers = Vec::with_capacity(4 * levers.len());
        for (finger, (lever, &mu)) in levers.iter().zip(&mus).enumerate() {
            let own = lever.generators(mu);
            generators.extend_from_slice(&own);
            fingers.extend(std::iter::repeat_n(finger, own.len()));
        }
        let curvatures = vec![0.0; levers.len()];
        Self { levers, mus, curvatures, generators, fingers }
    }

    /// The same contacts on edges of these curvatures, 1/mm, one for each finger. Only the placement tolerance asks.
    #[must_use]
    pub fn on_curves(mut self, curvatures: &[f64]) -> Self {
        self.curvatures.copy_from_slice(curvatures);
        self
    }

    /// Curvature of each contact's edge, 1/mm.
    pub fn curvatures(&self) -> &[f64] {
        &self.curvatures
    }

    /// The same contacts with every friction coefficient multiplied by a factor.
    pub fn with_friction_times(&self, factor: f64) -> Self {
        self.with_friction(self.mus.iter().map(|mu| mu * factor).collect())
    }

    /// The same contacts with friction coefficients of one's own.
    pub fn with_friction(&self, mus: Vec<f64>) -> Self {
        Self::from_levers(self.levers.clone(), mus).on_curves(&self.curvatures)
    }

    /// Number of fingers.
    pub fn finger_count(&self) -> usize {
        self.levers.len()
    }

    /// Levers, finger after finger.
    pub fn levers(&self) -> &[Lever] {
        &self.levers
    }

    /// Friction coefficient of each finger's contact.
    pub fn mus(&self) -> &[f64] {
        &self.mus
    }

    /// The common friction coefficient, when there is one.
    #[expect(clippy::float_cmp, reason = "equal means copied from the same setting, digit for digit")]
    pub fn common_mu(&self) -> Option<f64> {
        let first = *self.mus.first()?;
        self.mus.iter().all(|&mu| mu == first).then_some(first)
    }

    /// Generators (fx, fy, tau/l), finger after finger.
    pub fn generators(&self) -> &[Vector3<f64>] {
        &self.generators
    }

    /// Finger of each generator.
    pub fn fingers(&self) -> &[usize] {
        &self.fingers
    }

    /// W, 3 rows by one column for each generator.
    pub fn matrix(&self) -> Matrix3xX<f64> {
        Matrix3xX::from_columns(&self.generators)
    }

    /// Largest `u . w` over the generators: how far the wrench set reaches in direction u.
    pub fn support(&self, u: &Vector3<f64>) -> f64 {
        self.generators.iter().map(|w| u.dot(w)).fold(f64::NEG_INFINITY, f64::max)
    }
}
