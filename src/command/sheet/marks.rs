//! The marks on a drawing: fingers with their numbers, normals and cones, jaws, keep-outs, centre of mass, datum.

use super::drawing::{MOST_REASONS, Subject, pad_corners, reasons, step};
use super::labels::Taken;
use super::paper::Paper;
use crate::hand::Tip;
use crate::mechanics::Contact;
use crate::part::{Edge, KeepOut};
use nalgebra::{Point2, Rotation2, Vector2};
use std::fmt::{Result as Written, Write};

/// Length of a normal and of a cone, mm of paper.
const ARROW: f64 = 9.0;
/// Radius of a finger's number, mm of paper.
const NUMBER: f64 = 2.1;
/// From one stroke of the hatching to the next, and how far it stands out, mm of paper.
const STROKE: f64 = 1.4;
const STAND: f64 = 2.2;
/// Strokes of one keep-out, at most.
const MOST_STROKES: f64 = 4000.0;
/// Points of the outline that labels keep clear of, at most.
const MOST_POINTS: usize = 4000;

/// Writes a text that is escaped already; an empty anchor is the start.
pub(super) fn put(svg: &mut String, class: &str, at: Point2<f64>, anchor: &str, text: &str) -> Written {
    let anchor = if anchor.is_empty() { String::new() } else { format!(" text-anchor=\"{anchor}\"") };
    writeln!(svg, "<text class=\"{class}\"{anchor} x=\"{:.3}\" y=\"{:.3}\">{text}</text>", at.x, at.y)
}

/// The marks of one drawing.
pub(super) struct Marks<'a> {
    pub(super) svg: &'a mut String,
    pub(super) paper: &'a Paper,
    pub(super) subject: &'a Subject<'a>,
    /// What labels keep clear of.
    pub(super) taken: Taken,
}

impl Marks<'_> {
    /// Draws all of them, from the lowest up.
    pub(super) fn all(&mut self) -> Written {
        self.keep_clear_of_outline();
        let contacts = self.subject.grasp.map_or(&[][..], |grasp| &grasp.contacts[..]);
        for contact in contacts {
            self.body(contact)?;
        }
        self.keep_outs()?;
        for contact in contacts {
            self.cones(contact)?;
        }
        self.jaws()?;
        for (finger, contact) in contacts.iter().enumerate() {
            self.normal(finger, contact)?;
        }
        self.centre_of_mass()?;
        self.datum()?;
        for (finger, contact) in contacts.iter().enumerate() {
            self.number(finger, contact)?;
        }
        self.keep_out_labels()
    }

    fn keep_clear_of_outline(&mut self) {
        let outline = self.subject.part.outline();
        let every_mm = (1.5 / self.paper.length(1.0)).max(outline.perimeter_mm() / MOST_POINTS as f64);
        for edge in outline.edges().iter().take(MOST_POINTS) {
            let pieces = (edge.length_mm() / every_mm).ceil().max(1.0) as usize;
            for i in 0..pieces {
                let along_mm = edge.length_mm() * i as f64 / pieces as f64;
                self.taken.add(self.paper.at(edge.point_at(along_mm)), 0.3);
            }
        }
    }

    fn body(&mut self, contact: &Contact) -> Written {
        let hand = self.subject.hand;
        match hand.tip {
            Tip::Pin => {
                let centre = self.paper.at(contact.point - contact.normal * hand.pin_radius_mm);
                let r = self.paper.length(hand.pin_radius_mm);
                self.taken.add(centre, r);
                if r > 0.0 {
                    writeln!(
                        self.svg,
                        "<circle class=\"finger\" cx=\"{:.3}\" cy=\"{:.3}\" r=\"{r:.3}\"/>",
                        centre.x, centre.y
                    )?;
                }
            }
            Tip::Pad => {
                let corners = pad_corners(hand, contact.point, contact.normal).map(|corner| self.paper.at(corner));
                let points = corners.map(|p| format!("{:.3},{:.3}", p.x, p.y)).join(" ");
                writeln!(self.svg, "<polygon class=\"finger\" points=\"{points}\"/>")?;
                let half = self.paper.length(hand.pad_width_mm.min(hand.pad_depth_mm)) / 2.0;
                let depth = self.paper.length(hand.pad_depth_mm) / 2.0;
                self.taken.add(self.paper.at(contact.point) - Paper::toward(contact.normal) * depth, half.max(0.5));
            }
        }
        Ok(())
    }

    fn keep_outs(&mut self) -> Written {
        for keep_out in self.subject.part.keep_outs() {
            let Some(edge) = self.subject.part.outline().edge(keep_out.edge) else { continue };
            self.hatch(edge, keep_out)?;
        }
        Ok(())
    }

    /// A heavy line on the edge, and strokes that stand out from the material.
    fn hatch(&mut self, edge: &Edge, keep_out: &KeepOut) -> Written {
        let length_mm = keep_out.to_mm - keep_out.from_mm;
        let start = self.paper.at(edge.point_at(keep_out.from_mm));
        write!(self.svg, "<path class=\"kept\" d=\"M{:.3} {:.3}", start.x, start.y)?;
        step(self.svg, edge, self.paper, edge.point_at(keep_out.to_mm), length_mm)?;
        write!(self.svg, "\"/>\n<path class=\"keep-out\" d=\"")?;
        let strokes = (self.paper.length(length_mm) / STROKE).ceil().clamp(1.0, MOST_STROKES) as usize;
        for i in 0..=strokes {
            let along_mm = keep_out.from_mm + length_mm * i as f64 / strokes as f64;
            let foot = self.paper.at(edge.point_at(along_mm));
            let out = -Paper::toward(edge.normal_at(along_mm)) * STAND;
            // Slanted, so that they are not taken for teeth of the outline.
            let tip = foot + Rotation2::new(40_f64.to_radians()) * out;
            write!(self.svg, "M{:.3} {:.3}L{:.3} {:.3}", foot.x, foot.y, tip.x, tip.y)?;
            self.taken.add(foot + out / 2.0, 0.6);
        }
        writeln!(self.svg, "\"/>")
    }

    /// One number for each reason, at its longest interval.
    fn keep_out_labels(&mut self) -> Written {
        let part = self.subject.part;
        for (number, reason) in reasons(part).into_iter().enumerate().take(MOST_REASONS) {
            let own = part.keep_outs().iter().filter(|keep_out| keep_out.reason == reason);
            let longest = own.max_by(|a, b| (a.to_mm - a.from_mm).total_cmp(&(b.to_mm - b.from_mm)));
            let Some((keep_out, edge)) = longest.and_then(|own| Some((own, part.outline().edge(own.edge)?))) else {
                continue;
            };
            let middle = (keep_out.from_mm + keep_out.to_mm) / 2.0;
            let out = -Paper::toward(edge.normal_at(middle));
            let at = self.taken.place(self.paper.at(edge.point_at(middle)), out, STAND + 2.0, 1.8);
            put(self.svg, "keep-out-label", at + Vector2::new(0.0, 0.9), "middle", &format!("K{}", number + 1))?;
        }
        Ok(())
    }

    /// At the contact point, or at both ends of a face that lies flush: all that pushes lies between.
    fn cones(&mut self, contact: &Contact) -> Written {
        let normal = Paper::toward(contact.normal);
        let half = Rotation2::new(contact.mu.atan());
        let along = Vector2::new(contact.normal.y, -contact.normal.x) * contact.half_width_mm;
        let ends = if contact.half_width_mm > 0.0 { vec![-along, along] } else { vec![along] };
        for end in ends {
            let tip = self.paper.at(contact.point + end);
            let sides = [half * normal, half.inverse() * normal].map(|side| tip + side * ARROW);
            let [a, b] = sides;
            writeln!(
                self.svg,
                "<path class=\"cone\" d=\"M{:.3} {:.3}L{:.3} {:.3}A{ARROW} {ARROW} 0 0 0 {:.3} {:.3}Z\"/>",
                tip.x, tip.y, a.x, a.y, b.x, b.y
            )?;
        }
        Ok(())
    }

    fn normal(&mut self, finger: usize, contact: &Contact) -> Written {
        let (at, normal) = (self.paper.at(contact.point), Paper::toward(contact.normal));
        let tip = at + normal * ARROW;
        let side = Vector2::new(-normal.y, normal.x) * 0.9;
        let (neck, a, b) = (tip - normal * 2.0, tip - normal * 2.6 + side, tip - normal * 2.6 - side);
        writeln!(
            self.svg,
            "<path class=\"normal\" d=\"M{:.3} {:.3}L{:.3} {:.3}\"/>\
             <path class=\"head\" d=\"M{:.3} {:.3}L{:.3} {:.3}L{:.3} {:.3}Z\"/>\n\
             <circle class=\"contact\" data-finger=\"{}\" cx=\"{:.3}\" cy=\"{:.3}\" r=\"0.7\"/>",
            at.x,
            at.y,
            neck.x,
            neck.y,
            tip.x,
            tip.y,
            a.x,
            a.y,
            b.x,
            b.y,
            finger + 1,
            at.x,
            at.y
        )?;
        for part in [0.3, 0.6, 0.9] {
            self.taken.add(at + normal * (ARROW * part), 1.4);
        }
        Ok(())
    }

    /// In the finger where there is room, or beside it.
    fn number(&mut self, finger: usize, contact: &Contact) -> Written {
        let hand = self.subject.hand;
        let (out, at) = (-Paper::toward(contact.normal), self.paper.at(contact.point));
        let (deep, room) = match hand.tip {
            Tip::Pin => (2.0 * hand.pin_radius_mm, hand.pin_radius_mm),
            Tip::Pad => (hand.pad_depth_mm, hand.pad_width_mm.min(hand.pad_depth_mm) / 2.0),
        };
        let deep = self.paper.length(deep);
        let centre = if self.paper.length(room) > NUMBER + 0.7 {
            at + out * (deep / 2.0)
        } else {
            self.taken.place(at, out, deep + NUMBER + 0.8, NUMBER)
        };
        writeln!(self.svg, "<circle class=\"number\" cx=\"{:.3}\" cy=\"{:.3}\" r=\"{NUMBER}\"/>", centre.x, centre.y)?;
        put(self.svg, "number-text", centre + Vector2::new(0.0, 1.05), "", &(finger + 1).to_string())
    }

    /// The axis through both contacts, and the centre.
    fn jaws(&mut self) -> Written {
        let Some(Ok(jaws)) = self.subject.grasp.and_then(|grasp| grasp.jaws.as_ref()) else { return Ok(()) };
        let axis = Vector2::new(jaws.angle_rad.cos(), jaws.angle_rad.sin());
        let half = jaws.opening_mm / 2.0 + self.subject.hand.pad_depth_mm;
        let reach = Paper::toward(axis) * (self.paper.length(half) + 3.0);
        let centre = self.paper.at(jaws.centre);
        let (from, to) = (centre - reach, centre + reach);
        writeln!(
            self.svg,
            "<path class=\"axis\" d=\"M{:.3} {:.3}L{:.3} {:.3}\"/>\n\
             <circle class=\"mark jaw-centre\" cx=\"{x:.3}\" cy=\"{y:.3}\" r=\"1.5\"/>\
             <path class=\"thin\" d=\"M{:.3} {y:.3}h5M{x:.3} {:.3}v5\"/>",
            from.x,
            from.y,
            to.x,
            to.y,
            centre.x - 2.5,
            centre.y - 2.5,
            x = centre.x,
            y = centre.y
        )?;
        self.taken.add(centre, 2.5);
        let label = self.taken.place(centre, Vector2::new(0.8, -0.6), 4.0, 1.4);
        put(self.svg, "jaw-label", label + Vector2::new(0.0, 0.9), "middle", "J")
    }

    /// A circle with two black quarters.
    fn centre_of_mass(&mut self) -> Written {
        const R: f64 = 1.8;
        let at = self.paper.at(self.subject.part.com());
        let (x, y) = (at.x, at.y);
        self.taken.add(at, R);
        writeln!(
            self.svg,
            "<circle class=\"mark com\" cx=\"{x:.3}\" cy=\"{y:.3}\" r=\"{R}\"/>\
             <path class=\"black\" d=\"M{x:.3} {y:.3}v-{R}a{R} {R} 0 0 1 {R} {R}z\
             M{x:.3} {y:.3}v{R}a{R} {R} 0 0 1 -{R} -{R}z\"/>"
        )
    }

    fn datum(&mut self) -> Written {
        let at = self.paper.at(self.subject.datum);
        let (x, y) = (at.x, at.y);
        self.taken.add(at, 1.5);
        writeln!(
            self.svg,
            "<circle class=\"thin datum\" cx=\"{x:.3}\" cy=\"{y:.3}\" r=\"1.3\"/>\
             <path class=\"thin\" d=\"M{:.3} {y:.3}h5M{x:.3} {:.3}v5\"/>",
            x - 2.5,
            y - 2.5
        )
    }
}
