//! Sites: the positions on the stretches that candidate sets are made of.

use super::scene::{Scene, Spot};
use crate::hand::Stretch;
use crate::mechanics::Lever;
use nalgebra::Point2;
use std::ops::Range;

/// One position a finger may take, with all that scoring needs of it.
#[derive(Debug, Clone, Copy)]
pub(super) struct Site {
    /// Index into [`Scene::stretches`].
    pub stretch: u32,
    /// Distance along the edge, mm.
    pub along_mm: f64,
    /// Distance to the nearer end of the stretch, mm.
    pub room_mm: f64,
    /// Friction coefficient of the edge.
    pub mu: f64,
    /// Curvature of the edge, 1/mm.
    pub curvature: f64,
    /// Contact in the scene's frame.
    pub lever: Lever,
    /// Least and largest torque over l of the two cone edges at `mu`.
    pub torques: [[f64; 2]; 2],
    /// Axis of the pin, local frame, mm.
    pub centre: Point2<f64>,
}

/// All sites, stretch after stretch.
pub(super) struct Sites {
    all: Vec<Site>,
    /// First site of each stretch, and the total at the end.
    starts: Vec<usize>,
}

/// Number of [`positions`] on a stretch, as a float: it may be beyond any integer.
pub(super) fn count_on(stretch: &Stretch, spacing_mm: f64) -> f64 {
    2.0 * (stretch.length_mm() / (2.0 * spacing_mm)).ceil() + 1.0
}

/// Positions at most `spacing` apart, both ends and the middle included.
pub(super) fn positions(stretch: &Stretch, spacing_mm: f64) -> impl Iterator<Item = f64> {
    // A scene has no more sites than memory holds.
    let steps = count_on(stretch, spacing_mm) as usize - 1;
    let (from, length, to) = (stretch.from_mm, stretch.length_mm(), stretch.to_mm);
    (0..=steps).map(move |i| match i {
        0 => from,
        i if i == steps => to,
        i => from + length * (i as f64 / steps as f64),
    })
}

impl Sites {
    pub(super) fn of(scene: &Scene) -> Self {
        let spacing_mm = scene.setup().search.spacing_for(scene.part());
        let mut all = Vec::new();
        let mut starts = Vec::with_capacity(scene.stretches().len() + 1);
        for (number, stretch) in scene.stretches().iter().enumerate() {
            starts.push(all.len());
            let Some(edge) = scene.part().outline().edge(stretch.edge) else { continue };
            for along_mm in positions(stretch, spacing_mm) {
                let contact = scene.contact(edge, along_mm);
                let (mu, lever) = (contact.mu, Lever::of(&contact, scene.frame()));
                all.push(Site {
                    stretch: number as u32,
                    along_mm,
                    room_mm: stretch.room_mm(along_mm),
                    mu,
                    curvature: edge.curvature(),
                    lever,
                    torques: [lever.torques(mu), lever.torques(-mu)],
                    centre: contact.point - contact.normal * scene.setup().hand.pin_radius_mm,
                });
            }
        }
        starts.push(all.len());
        Self { all, starts }
    }

    pub(super) fn len(&self) -> usize {
        self.all.len()
    }

    pub(super) fn stretch_count(&self) -> usize {
        self.starts.len() - 1
    }

    /// Numbers of the sites on a stretch.
    pub(super) fn on(&self, stretch: usize) -> Range<usize> {
        self.starts[stretch]..self.starts[stretch + 1]
    }

    /// First site of a stretch; the number of sites for one past the last stretch.
    pub(super) fn on_or_end(&self, stretch: usize) -> usize {
        self.starts[stretch]
    }

    pub(super) fn get(&self, site: u32) -> &Site {
        &self.all[site as usize]
    }

    pub(super) fn spot(&self, scene: &Scene, site: u32) -> Spot {
        let site = self.get(site);
        Spot { edge: scene.stretches()[site.stretch as usize].edge, along_mm: site.along_mm }
    }
}
