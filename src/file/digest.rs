//! Digests: of a part, to tell whether saved scores are of the part as it is; of a file, to tell whether it changed.

use crate::part::Part;
use sha2::{Digest, Sha256};

/// Digits of a digest: 256 bits, four to a digit.
pub(super) const HEX_DIGITS: usize = 64;

/// SHA-256 of bytes, in hexadecimal.
pub(super) fn of_bytes(bytes: &[u8]) -> String {
    Sha256::digest(bytes).iter().map(|byte| format!("{byte:02x}")).collect()
}

/// SHA-256, in hexadecimal, of everything about a part that alters a score or a contact's place: rings and arcs in mm, centre of
/// mass, mass, thickness, keep-outs, edges with their own friction or limits. Names, reasons and the unit of the file do not
/// count, as long as the lengths in mm are the same digit for digit.
pub fn part_digest(part: &Part) -> String {
    let mut bytes = Canonical(Vec::new());
    let outline = part.outline();
    bytes.numbers(&[outline.origin().x, outline.origin().y]);
    let sizes = outline.ring_sizes();
    bytes.count(sizes.len());
    for (ring, size) in sizes.into_iter().enumerate() {
        bytes.count(size);
        for edge in outline.ring(ring) {
            bytes.numbers(&[edge.start().x, edge.start().y]);
        }
    }
    // A part without arcs has the digest it had before there were any.
    for edge in outline.edges().iter().filter(|edge| edge.arc().is_some()) {
        bytes.count(edge.id().ring);
        bytes.count(edge.id().edge);
        bytes.numbers(&[edge.curvature()]);
    }
    bytes.numbers(&[part.com().x, part.com().y]);
    for option in [part.mass().map(|mass| mass.kg), part.thickness_mm()] {
        bytes.count(option.iter().len());
        bytes.numbers(option.as_slice());
    }
    bytes.count(part.keep_outs().len());
    for keep_out in part.keep_outs() {
        bytes.count(keep_out.edge.ring);
        bytes.count(keep_out.edge.edge);
        bytes.numbers(&[keep_out.from_mm, keep_out.to_mm]);
    }
    bytes.count(part.edge_friction().len());
    for own in part.edge_friction() {
        bytes.count(own.edge.ring);
        bytes.count(own.edge.edge);
        bytes.numbers(&[own.mu]);
    }
    // As with arcs: a part without limits has the digest it had before there were any.
    for limit in part.edge_limits() {
        bytes.count(limit.edge.ring);
        bytes.count(limit.edge.edge);
        for option in [limit.face_mpa, limit.line_n_per_mm] {
            bytes.count(option.iter().len());
            bytes.numbers(option.as_slice());
        }
    }
    of_bytes(&bytes.0)
}

/// Bytes of which no two different sequences of calls give the same.
struct Canonical(Vec<u8>);

impl Canonical {
    fn count(&mut self, count: usize) {
        self.0.extend((count as u64).to_le_bytes());
    }

    fn numbers(&mut self, numbers: &[f64]) {
        for number in numbers {
            // Minus nought is nought.
            self.0.extend((number + 0.0).to_bits().to_le_bytes());
        }
    }
}
