//! The order of grasps: a key, then fixed tie-breaks, total and independent of threads.

/// What grasps are sorted by.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum Key {
    /// Quality with a limit on the total normal force; largest first.
    Quality,
    /// Quality with a limit on each finger; largest first.
    QualityPerFinger,
    /// Friction needed; smallest first.
    Friction,
    /// Placement tolerance; largest first.
    Placement,
}

impl Key {
    /// All keys, in the order they are offered.
    pub const ALL: [Self; 4] = [Self::Quality, Self::QualityPerFinger, Self::Friction, Self::Placement];

    /// The word used on the command line and in files.
    pub fn word(self) -> &'static str {
        match self {
            Self::Quality => "quality",
            Self::QualityPerFinger => "quality_per_finger",
            Self::Friction => "friction",
            Self::Placement => "placement",
        }
    }

    /// The key of a word.
    pub fn from_word(word: &str) -> Option<Self> {
        Self::ALL.into_iter().find(|key| key.word() == word)
    }
}
