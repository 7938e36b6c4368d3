//! Sites: the positions on the stretches that candidate sets are made of.

use super::scene::{Scene, Spot};
use crate::hand::{Closing, Stretch};
use crate::mechanics::Lever;
use nalgebra::Point2;
use std::ops::Range;

/// One position a finger may take, with all that scoring needs of it.
#[derive(Debug, Clone, Copy)]
pub(super) struct Site {
    /// Index into [`Scene::places`].
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
    /// Contact, local frame, mm.
    pub point: Point2<f64>,
    /// Axis of a pin there, local frame, mm.
    pub centre: Point2<f64>,
}

/// All sites, group after group.
///
/// Fingers that close freely have one group for each place, those that are kept first, and any site of one goes with any of another. Parallel
/// jaws have two groups for each run of theirs, 2 r and 2 r + 1, and the n-th site of the one goes with the n-th of the other.
pub(super) struct Sites {
    all: Vec<Site>,
    /// First site of each group, and the total at the end.
    starts: Vec<usize>,
    paired: bool,
    kept: usize,
}

/// Number of [`positions`] on a length, as a float: it may be beyond any integer.
pub(super) fn count_on(length_mm: f64, spacing_mm: f64) -> f64 {
    2.0 * (length_mm / (2.0 * spacing_mm)).ceil() + 1.0
}

/// Positions at most `spacing` apart, both ends and the middle included.
pub(super) fn positions(from_mm: f64, to_mm: f64, spacing_mm: f64) -> impl Iterator<Item = f64> {
    let length_mm = to_mm - from_mm;
    // A scene has no more sites than memory holds.
    let steps = count_on(length_mm, spacing_mm) as usize - 1;
    (0..=steps).map(move |i| match i {
        0 => from_mm,
        i if i == steps => to_mm,
        i => from_mm + length_mm * (i as f64 / steps as f64),
    })
}

impl Sites {
    pub(super) fn of(scene: &Scene) -> Self {
        let spacing_mm = scene.setup().search.spacing_for(scene.part());
        let mut sites = Self { all: Vec::new(), starts: Vec::new(), paired: false, kept: scene.kept().len() };
        match scene.setup().hand.closing {
            Closing::Free => {
                for (number, place) in scene.places().iter().enumerate() {
                    let Stretch { from_mm, to_mm, .. } = place.span;
                    // A finger that is kept has one site.
                    let kept = number < scene.kept().len();
                    let most = if kept { 1 } else { usize::MAX };
                    sites.add(scene, number, positions(from_mm, to_mm, spacing_mm).take(most));
                }
            }
            Closing::Parallel => {
                sites.paired = true;
                for run in scene.jaw_runs() {
                    for finger in [0, 1] {
                        let along = positions(0.0, run.length_mm(), spacing_mm).map(|u| run.along_mm(u)[finger]);
                        sites.add(scene, run.stretches[finger], along);
                    }
                }
            }
        }
        sites.starts.push(sites.all.len());
        sites
    }

    /// Adds a group on a stretch.
    fn add(&mut self, scene: &Scene, number: usize, along: impl Iterator<Item = f64>) {
        self.starts.push(self.all.len());
        let place = &scene.places()[number];
        let Some(edge) = scene.part().outline().edge(place.span.edge) else { return };
        for along_mm in along {
            let contact = scene.contact(edge, along_mm);
            let (mu, lever) = (contact.mu, Lever::of(&contact, scene.frame()));
            self.all.push(Site {
                stretch: number as u32,
                along_mm,
                room_mm: place.whole.room_mm(along_mm).max(0.0),
                mu,
                curvature: edge.curvature(),
                lever,
                torques: [lever.torques(mu), lever.torques(-mu)],
                point: contact.point,
                centre: contact.point - contact.normal * scene.setup().hand.pin_radius_mm,
            });
        }
    }

    /// True when sites go together in pairs, as those of parallel jaws do.
    pub(super) fn are_paired(&self) -> bool {
        self.paired
    }

    /// Fingers that are kept: so many groups at the beginning have one site each, and every candidate set has them.
    pub(super) fn kept(&self) -> usize {
        self.kept
    }

    pub(super) fn len(&self) -> usize {
        self.all.len()
    }

    pub(super) fn group_count(&self) -> usize {
        self.starts.len() - 1
    }

    /// Numbers of the sites of a group.
    pub(super) fn on(&self, group: usize) -> Range<usize> {
        self.starts[group]..self.starts[group + 1]
    }

    /// First site of a group; the number of sites for one past the last group.
    pub(super) fn on_or_end(&self, group: usize) -> usize {
        self.starts[group]
    }

    pub(super) fn get(&self, site: u32) -> &Site {
        &self.all[site as usize]
    }

    pub(super) fn spot(&self, scene: &Scene, site: u32) -> Spot {
        let site = self.get(site);
        Spot { edge: scene.places()[site.stretch as usize].span.edge, along_mm: site.along_mm }
    }
}
