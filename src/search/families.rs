//! families
