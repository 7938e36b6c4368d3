//! Sound files to start from, and the means to break them in one place.
#![allow(dead_code, reason = "each test program uses some of this")]

/// A part file with every key a part can have but those that override another.
pub(crate) const HINGE: &str = r#"schema = 1
name = "hinge leaf"
units = "mm"
thickness = 6.0
material = "aluminium 5083"
com = [31.0, 18.5]
outer = [
  [0.0, 0.0],
  [80.0, 0.0],
  [80.0, 40.0],
  [0.0, 40.0],
]
holes = [
  [[10.0, 10.0], [14.0, 10.0], [12.0, 14.0]],
]

[[keep_out]]
ring = 0
edge = 2
from = 0.0
to = 12.0
reason = "sealing face"

[[edge_friction]]
ring = 0
edge = 1
mu = 0.6
"#;

/// A setup file with every kind of key.
pub(crate) const CELL: &str = r#"schema = 1
[friction]
mu = 0.20
low = 0.15
nominal = 0.25
high = 0.40
sliding = 0.15
condition = "dry"
source = "own tilt test, 3 Nov"

[hand]
fingers = 2
tip = "pad"
closing = "parallel"
pin_radius_mm = 3.0
pad_width_mm = 10.0
pad_depth_mm = 7.0
bite_mm = 5.0
opening_mm = [5.0, 110.0]
corner_clearance_mm = 1.5
gap_mm = 0.5
force_limit_n = 60.0
drive = "equal"

[search]
spacing_mm = 2.5
budget = 12345
seed = 7
torque_scale = 40
cone_sides = 12

[floors]
quality = 0.01
friction_margin = 1.2
placement_mm = 0.3
load_margin = 1.5

[[load]]
name = "lift"
gravity = [0.0, 0.0, -1.0]
acceleration_m_s2 = [0.0, 0.0, 3.0]
safety = 2.0
[[load]]
name = "emergency stop"
any_direction_m_s2 = 8.0
[[load]]
name = "brush"
force_n = [0.0, -6.0, 0.0]
at_mm = [40.0, 0, 0.0]
squeeze_left = 0.5
"#;

/// The sound text with one thing put in the place of another.
pub(crate) fn broken(sound: &str, from: &str, to: &str) -> String {
    assert_eq!(sound.matches(from).count(), 1, "{from:?} must stand once in the sound file");
    sound.replacen(from, to, 1)
}

/// Line, from 1, on which a piece of text stands.
pub(crate) fn line_of(text: &str, piece: &str) -> usize {
    text[..text.find(piece).expect("piece")].matches('\n').count() + 1
}
