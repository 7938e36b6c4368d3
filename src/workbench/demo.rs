//! The parts that come with the program, to try it on.

/// A file that comes with the program.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Demo {
    /// Name it is written under.
    pub file: &'static str,
    /// What is in it.
    pub text: &'static str,
}

macro_rules! demo {
    ($file:literal) => {
        Demo { file: $file, text: include_str!(concat!("../../parts/", $file)) }
    };
}

/// The parts.
pub const PARTS: [Demo; 13] = [
    demo!("hinge_leaf.toml"),
    demo!("cleat_base.toml"),
    demo!("rudder_bracket.toml"),
    demo!("angle_bracket.toml"),
    demo!("batten_strap.toml"),
    demo!("chain_plate.toml"),
    demo!("fender_block.toml"),
    demo!("mast_collar_flange.toml"),
    demo!("pintle_washer.toml"),
    demo!("rowlock_plate.toml"),
    demo!("strainer_plate.toml"),
    demo!("thwart_knee.toml"),
    demo!("fairlead.toml"),
];

/// The cell they are opened in.
pub const SETUP: Demo = demo!("deck_cell.setup.toml");
