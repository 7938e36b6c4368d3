//! The page of one grasp, and the document of all of them.

use super::drawing::{Drawing, LOOK, Subject};
use super::markup::{cut, escaped, lines};
use super::tables::{self, Piece, Source};
use super::words;
use crate::command::reading::Reading;
use crate::command::recheck::{Checked, Outcome};
use crate::file::{CAUTION, shown};
use crate::search::Scene;
use nalgebra::Point2;
use std::path::Path;

const STYLE: &str = include_str!("page.css");

/// Width and height of a page within its margins, mm: what A4 (210 x 297) and Letter (215.9 x 279.4) both have.
const WIDTH: f64 = 186.0;
const HEIGHT: f64 = 256.0;
/// Heights of what stands on every page: head, caution, foot, and what rounding may take, mm.
const FIXED: f64 = 16.0 + 10.0 + 4.2 + 3.0;
/// Load cases on a page, at most.
const MOST_CASES: usize = 10;
/// Height of the drawing that other things make room for, mm.
const LEAST_DRAWING: f64 = 80.0;
/// Lines of a note, and of the reasons for a warning, at most; characters in each.
const MOST_LINES: usize = 4;
const LINE_WIDTH: usize = 120;

/// One grasp and all that is printed of it.
pub(super) struct Sheet<'a> {
    pub(super) checked: Checked<'a>,
    pub(super) reading: Option<Reading>,
    pub(super) scene: &'a Scene,
    pub(super) saved: &'a crate::file::SavedGrasp,
    /// Datum in the part's frame, and which point that is.
    pub(super) datum: (Point2<f64>, &'a str),
    /// The part is not the one that the grasp was saved for.
    pub(super) part_changed: bool,
}

/// Where the pages come from.
pub(super) struct Origin<'a> {
    /// The grasp file.
    pub(super) grasps: &'a Path,
    /// The part file.
    pub(super) part: &'a Path,
    /// Digest of the part as it is, and of the one the file was begun for.
    pub(super) digests: [&'a str; 2],
}

impl Sheet<'_> {
    /// The grasp holds, and on the part it was saved for.
    pub(super) fn is_sound(&self) -> bool {
        !self.part_changed && self.checked.outcome == Outcome::Holds
    }

    /// Why the sheet is not to be used as it is, in large words.
    fn warning(&self) -> Option<String> {
        let mut said = Vec::new();
        if self.part_changed {
            said.push("PART CHANGED");
        }
        said.extend(match self.checked.outcome {
            Outcome::Holds => None,
            Outcome::ScoreChanged => Some("SCORES CHANGED"),
            Outcome::LoadsNoLongerHeld => Some("LOADS NO LONGER HELD"),
            Outcome::LoadsNotHeld => Some("LOADS NOT HELD"),
            Outcome::NoLongerClosed => Some("NO LONGER CLOSED"),
            Outcome::NeverClosed => Some("NOT CLOSED"),
            Outcome::NoLongerFits => Some("NO LONGER FITS"),
            Outcome::Inconclusive => Some("INCONCLUSIVE"),
        });
        (!said.is_empty()).then(|| said.join("; "))
    }

    /// What is wrong, for whoever started the command.
    pub(super) fn complaint(&self) -> String {
        let part = if self.part_changed { "the part is not the one it was saved for; " } else { "" };
        format!("{part}{}", self.checked.outcome.words())
    }

    fn subject(&self) -> Subject<'_> {
        Subject {
            part: self.scene.part(),
            hand: &self.scene.setup().hand,
            grasp: self.reading.as_ref().map(|reading| &reading.grasp),
            datum: self.datum.0,
            datum_words: self.datum.1,
        }
    }

    fn title(&self) -> String {
        format!("{}: {}", self.scene.part().name(), self.saved.name)
    }

    /// The drawing alone.
    pub(super) fn svg(&self) -> String {
        Drawing::of(&self.subject(), (WIDTH, HEIGHT), self.warning().as_deref()).file(&self.title())
    }

    /// The page.
    fn html(&self, origin: &Origin<'_>, number: usize, count: usize) -> String {
        let source =
            Source { saved: self.saved, scene: self.scene, reading: self.reading.as_ref(), datum: self.datum.0 };
        let scores = tables::scores(&source);
        let mut beside = tables::friction_band(&source).unwrap_or(Piece { html: String::new(), height: 0.0 });
        beside.and(tables::assumed(&source));
        let columns = FIXED + scores.height.max(beside.height);
        let filled = |(cases, lines): (usize, usize)| {
            let mut head = self.warning_box();
            head.and(self.note(lines));
            let mut wide = tables::fingers(&source);
            wide.and(tables::loads(&source, cases));
            let left = HEIGHT - columns - head.height - wide.height;
            (head, wide, left)
        };
        // On a full page the drawing gets its room from the load cases that ask least, then from the note.
        let tries = (2..=MOST_CASES).rev().map(|cases| (cases, MOST_LINES)).chain([(2, 1), (1, 1)]);
        let fitting = tries.map(filled).find(|(_, _, left)| *left >= LEAST_DRAWING);
        let (head, wide, left) = fitting.unwrap_or_else(|| filled((1, 1)));
        let drawing = Drawing::of(&self.subject(), (WIDTH, left), None);
        format!(
            "<section class=\"page\">\n{}{}<div class=\"figure\">{}</div>\n{}\
             <div class=\"columns\"><div>{}</div><div>{}</div></div>\n\
             <p class=\"caution\">{}</p>\n{}</section>\n",
            self.header(),
            head.html,
            drawing.inline(&self.title()),
            wide.html,
            scores.html,
            beside.html,
            escaped(CAUTION),
            self.footer(origin, number, count)
        )
    }

    fn header(&self) -> String {
        let part = self.scene.part();
        let saved = self
            .saved
            .time
            .map_or("at a time unknown".to_owned(), |time| time.strftime("%Y-%m-%d %H:%M UTC").to_string());
        let (first, second) = match (self.is_sound(), self.checked.held) {
            (true, Some(_)) => ("HELD", "closed, every load held"),
            (true, None) => ("CLOSED", "no load case"),
            (false, _) => ("SEE BELOW", "not to be used as it is"),
        };
        format!(
            "<header><div><h1>{}</h1>\n<p><b>{}</b>: {}</p>\n<p>saved {saved}</p></div>\n\
             <div class=\"stamp\"><b>{first}</b>{second}</div></header>\n",
            escaped(&cut(&shown(&self.saved.name), 52)),
            escaped(&cut(part.name(), 40)),
            escaped(&cut(&words::part(part), 60))
        )
    }

    fn warning_box(&self) -> Piece {
        let Some(warning) = self.warning() else { return Piece { html: String::new(), height: 0.0 } };
        let changes = self.checked.changes.iter().map(|change| {
            let value = |score: Option<f64>| score.map_or("none".to_owned(), words::given);
            format!("{} {} -> {}", change.score, value(change.was), value(change.now))
        });
        let why = self.checked.reasons.iter().cloned().chain(changes).collect::<Vec<_>>().join("; ");
        let told = limited(&why, MOST_LINES - 1);
        let html = format!(
            "<div class=\"warning-box\"><strong>{warning}</strong>\
             Everything below is of the part as it is now.<br/>{}</div>\n",
            told.join("<br/>")
        );
        Piece { html, height: 2.0 + 2.4 + 2.4 + 8.0 + 3.4 * (told.len() + 1) as f64 }
    }

    fn note(&self, most: usize) -> Piece {
        let told = limited(&self.saved.note, most);
        if told.is_empty() {
            return Piece { html: String::new(), height: 0.0 };
        }
        Piece { html: format!("<p class=\"note\">{}</p>\n", told.join("<br/>")), height: 1.5 + 3.4 * told.len() as f64 }
    }

    fn footer(&self, origin: &Origin<'_>, number: usize, count: usize) -> String {
        let name = |path: &Path| {
            let name = path.file_name().map_or(String::new(), |name| name.to_string_lossy().into_owned());
            escaped(&cut(&name, 34))
        };
        let [now, saved] = origin.digests.map(|digest| escaped(digest.get(..12).unwrap_or_default()));
        let digest = if self.part_changed { format!("{now} (saved for {saved})") } else { now };
        format!(
            "<footer><span>{}, part {}, digest {}</span><span>{}</span><span>{number} / {count}</span></footer>\n",
            name(origin.grasps),
            name(origin.part),
            digest,
            concat!("holdwright ", env!("CARGO_PKG_VERSION"))
        )
    }
}

/// Stands where a text is cut.
const MORE: &str = " ... (more of it in the grasp file, or by the command check)";

/// Lines of a text as they are printed, with a word where not all of it is.
fn limited(text: &str, most: usize) -> Vec<String> {
    let mut all: Vec<String> = text.lines().flat_map(|line| lines(&shown(line), LINE_WIDTH)).collect();
    if all.len() > most {
        all.truncate(most);
        if let Some(last) = all.last_mut() {
            *last = format!("{}{MORE}", last.chars().take(LINE_WIDTH - MORE.len()).collect::<String>());
        }
    }
    all.iter().map(|line| escaped(line)).collect()
}

/// All pages as one document that needs nothing else.
pub(super) fn document(sheets: &[Sheet<'_>], origin: &Origin<'_>) -> String {
    let pages: String = sheets.iter().enumerate().map(|(i, sheet)| sheet.html(origin, i + 1, sheets.len())).collect();
    let title = sheets.first().map_or(String::new(), |sheet| escaped(sheet.scene.part().name()));
    format!(
        "<!DOCTYPE html>\n<html xmlns=\"http://www.w3.org/1999/xhtml\" lang=\"en\">\n\
         <head>\n<meta charset=\"utf-8\"/>\n\
         <meta http-equiv=\"Content-Security-Policy\" content=\"default-src 'none'; style-src 'unsafe-inline'\"/>\n\
         <title>{title}: grasps</title>\n<style>\n{STYLE}{LOOK}</style>\n</head>\n<body>\n{pages}</body>\n</html>\n"
    )
}
