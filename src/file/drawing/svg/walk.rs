//! The tree of elements: what is shown, where it is placed, and on which layer.

use super::super::fault::{Fault, quoted, short};
use super::super::sheet::{Id, MOST_PIECES, Path, Sheet, Weight, too_much};
use super::shape::{SHAPES, length, shape};
use super::viewport::{fit, view_box};
use kurbo::Affine;
use roxmltree::{Document, Node, NodeId};
use std::collections::HashMap;
use std::rc::Rc;
use svgtypes::{TransformListParser, TransformListToken};

const SVG: &str = "http://www.w3.org/2000/svg";
const XLINK: &str = "http://www.w3.org/1999/xlink";
/// Uses within uses.
const DEEPEST: usize = 32;

/// What holds for an element and all below it; children of one element share it.
#[derive(Clone)]
struct Around {
    place: Affine,
    layer: usize,
    /// Why nothing here is shown; what is merely not visible may be made visible again below.
    gone: Option<&'static str>,
    visible: bool,
    filled: bool,
    stroked: bool,
    /// Elements whose use this is, outermost first.
    uses: Vec<NodeId>,
    /// Size of the viewport a used symbol or svg is to fill.
    size: [Option<f64>; 2],
}

struct Walk<'s, 'd, 'i> {
    sheet: &'s mut Sheet,
    by_id: HashMap<&'d str, Node<'d, 'i>>,
    lines: &'s [usize],
    /// Elements looked at, those in uses each time.
    met: usize,
    styled: bool,
}

/// Places every shape of a document.
///
/// # Errors
/// The first fault found.
pub(super) fn walk(
    document: &Document<'_>,
    lines: &[usize],
    sheet: &mut Sheet,
    tell: &mut dyn FnMut(u64, u64),
) -> Result<(), Fault> {
    let root = document.root_element();
    let mut by_id = HashMap::new();
    let mut styled = false;
    for node in root.descendants().filter(Node::is_element) {
        if let Some(id) = node.attribute("id") {
            by_id.entry(id).or_insert(node);
        }
        styled |= name_of(&node) == Some("style");
    }
    if styled {
        sheet.notes.push("style sheets are not applied; what only they hide is read".to_owned());
    }
    let layer = sheet.layer("");
    let top = Around {
        place: Affine::IDENTITY,
        layer,
        gone: None,
        visible: true,
        filled: true,
        stroked: false,
        uses: Vec::new(),
        size: [None; 2],
    };
    let mut walk = Walk { sheet, by_id, lines, met: 0, styled };
    let mut around = walk.entered(&root, &top, true)?;
    // The transform of a viewBox is in the sheet's own map already; a transform on the root counts.
    around.size = [None; 2];
    let mut waiting: Vec<(Node<'_, '_>, Rc<Around>)> = Vec::new();
    push_children(&mut waiting, &root, around);
    while let Some((node, around)) = waiting.pop() {
        walk.met += 1;
        if walk.met > 4 * MOST_PIECES {
            return Err(too_much());
        }
        if walk.met % 4096 == 0 {
            tell((walk.sheet.placed.len()) as u64, MOST_PIECES as u64);
        }
        walk.element(node, &around, &mut waiting)?;
    }
    Ok(())
}

/// Children in the order of the document, the first on top.
fn push_children<'d, 'i>(waiting: &mut Vec<(Node<'d, 'i>, Rc<Around>)>, node: &Node<'d, 'i>, around: Around) {
    let around = Rc::new(around);
    for child in node.children().rev().filter(Node::is_element) {
        waiting.push((child, around.clone()));
    }
}

/// Name of an element of SVG; nothing for those of other name spaces.
fn name_of<'d>(node: &Node<'d, '_>) -> Option<&'d str> {
    let tag = node.tag_name();
    tag.namespace().is_none_or(|space| space == SVG).then(|| tag.name())
}

/// A presentation property: from the style attribute, else from the attribute of that name.
fn property<'d>(node: &Node<'d, '_>, name: &str) -> Option<&'d str> {
    let in_style = node.attribute("style").and_then(|style| {
        let entries = style.split(';').filter_map(|entry| entry.split_once(':'));
        entries.filter(|(key, _)| key.trim() == name).map(|(_, value)| value.trim()).last()
    });
    in_style.or_else(|| node.attribute(name).map(str::trim))
}

impl<'d, 'i> Walk<'_, 'd, 'i> {
    fn id(&self, node: &Node<'_, '_>) -> Id {
        match node.attribute("id") {
            Some(id) => Id::Name(short(id).into()),
            None => Id::Line(self.line(node)),
        }
    }

    fn line(&self, node: &Node<'_, '_>) -> usize {
        self.lines.partition_point(|&start| start <= node.range().start)
    }

    fn fault(&self, node: &Node<'_, '_>, kind: &str, text: &str) -> Fault {
        Fault { line: Some(self.line(node)), text: format!("{}: {text}", self.id(node).words(kind)) }
    }

    /// What holds inside an element.
    fn entered(&mut self, node: &Node<'_, '_>, around: &Around, is_root: bool) -> Result<Around, Fault> {
        let mut inside = around.clone();
        if property(node, "display") == Some("none") {
            inside.gone = inside.gone.or(Some("it is not displayed"));
        }
        match property(node, "visibility") {
            Some("hidden" | "collapse") => inside.visible = false,
            Some("visible") => inside.visible = true,
            _ => {}
        }
        match property(node, "fill") {
            None | Some("inherit") => {}
            Some(paint) => inside.filled = paint != "none",
        }
        match property(node, "stroke") {
            None | Some("inherit") => {}
            Some(paint) => inside.stroked = paint != "none",
        }
        if let Some(text) = node.attribute("transform") {
            let place = transform(text).ok_or_else(|| {
                self.fault(
                    node,
                    node.tag_name().name(),
                    &format!("its transform {} is not understood", quoted(text.as_bytes())),
                )
            })?;
            inside.place = around.place * place;
        }
        if !is_root
            && property(node, "transform")
                .is_some_and(|value| node.attribute("transform").map(str::trim) != Some(value))
        {
            return Err(self.fault(
                node,
                node.tag_name().name(),
                "its transform stands in a style; write it as the attribute transform",
            ));
        }
        Ok(inside)
    }

    fn element(
        &mut self,
        node: Node<'d, 'i>,
        around: &Around,
        waiting: &mut Vec<(Node<'d, 'i>, Rc<Around>)>,
    ) -> Result<(), Fault> {
        let Some(kind) = name_of(&node) else { return Ok(()) };
        let mut inside = self.entered(&node, around, false)?;
        if let Some(shape) = SHAPES.into_iter().find(|shape| *shape == kind) {
            return self.shape(&node, shape, &inside);
        }
        match kind {
            "g" | "a" => {
                self.choose_layer(&node, &mut inside);
                push_children(waiting, &node, inside);
            }
            "svg" => {
                if self.viewport(&node, &mut inside)? {
                    push_children(waiting, &node, inside);
                }
            }
            "symbol" if !around.uses.is_empty() && around.uses.last() == Some(&node.id()) => {
                if self.viewport(&node, &mut inside)? {
                    push_children(waiting, &node, inside);
                }
            }
            "use" => self.used(&node, inside, waiting)?,
            _ => self.other(&node, kind, &inside),
        }
        Ok(())
    }

    /// A group that is a layer of a drawing program, or stands at the top with a name.
    fn choose_layer(&mut self, node: &Node<'_, '_>, inside: &mut Around) {
        let own =
            |name: &str| node.attributes().find(|a| a.name() == name && a.namespace().is_some()).map(|a| a.value());
        let is_layer = own("groupmode") == Some("layer");
        let at_top = node.parent_element().is_some_and(|parent| parent.parent_element().is_none());
        let name = own("label").or_else(|| node.attribute("id"));
        if let Some(name) = name.filter(|_| is_layer || (at_top && inside.uses.is_empty())) {
            inside.layer = self.sheet.layer(name);
        }
    }

    /// The frame of a nested svg or a used symbol; false when it cannot be told.
    fn viewport(&mut self, node: &Node<'_, '_>, inside: &mut Around) -> Result<bool, Fault> {
        let kind = if node.tag_name().name() == "svg" { "svg" } else { "symbol" };
        let own = |name: &str| length(node, name);
        let sizes = (own("x"), own("y"), own("width"), own("height"));
        let (Ok(x), Ok(y), Ok(width), Ok(height)) = sizes else {
            self.skip(kind, node, "its size depends on what is around; give plain numbers", Weight::Missed, inside);
            return Ok(false);
        };
        let (width, height) = (inside.size[0].or(width), inside.size[1].or(height));
        inside.size = [None; 2];
        if kind == "svg" {
            inside.place *= Affine::translate((x.unwrap_or(0.0), y.unwrap_or(0.0)));
        }
        let Some(view) = view_box(node)? else { return Ok(true) };
        match (width, height) {
            (Some(width), Some(height)) if width > 0.0 && height > 0.0 => {
                inside.place *= fit(node, view, width, height)?;
                Ok(true)
            }
            _ => {
                self.skip(kind, node, "it has a viewBox but no width and height", Weight::Missed, inside);
                Ok(false)
            }
        }
    }

    fn used(
        &mut self,
        node: &Node<'d, 'i>,
        mut inside: Around,
        waiting: &mut Vec<(Node<'d, 'i>, Rc<Around>)>,
    ) -> Result<(), Fault> {
        let target = node.attribute("href").or_else(|| node.attribute((XLINK, "href"))).unwrap_or_default();
        let Some(target) = target.strip_prefix('#').and_then(|id| self.by_id.get(id)).copied() else {
            let why = format!("there is nothing {} in this file", quoted(target.as_bytes()));
            self.skip("use", node, &why, Weight::Missed, &inside);
            return Ok(());
        };
        if inside.uses.contains(&target.id()) {
            return Err(self.fault(node, "use", "it shows itself; mend it"));
        }
        if inside.uses.len() >= DEEPEST {
            return Err(self.fault(node, "use", "uses are nested too deep; replace some of them by what they show"));
        }
        let own = |name: &str| length(node, name);
        let (Ok(x), Ok(y), Ok(width), Ok(height)) = (own("x"), own("y"), own("width"), own("height")) else {
            self.skip("use", node, "its place depends on what is around; give plain numbers", Weight::Missed, &inside);
            return Ok(());
        };
        inside.place *= Affine::translate((x.unwrap_or(0.0), y.unwrap_or(0.0)));
        inside.size = [width, height];
        inside.uses.push(target.id());
        waiting.push((target, Rc::new(inside)));
        Ok(())
    }

    fn skip(&mut self, kind: &str, node: &Node<'_, '_>, why: &str, weight: Weight, around: &Around) {
        let id = self.id(node);
        let (why, weight) = around.gone.map_or((why, weight), |gone| (gone, Weight::Harmless));
        self.sheet.skip(kind, &id, why, weight, around.layer);
    }

    fn shape(&mut self, node: &Node<'_, '_>, kind: &'static str, around: &Around) -> Result<(), Fault> {
        // Without style sheets an element that is neither filled nor stroked cannot be seen.
        let unpainted = !(around.filled || around.stroked || self.styled);
        let hidden = around
            .gone
            .or((!around.visible).then_some("it is hidden"))
            .or(unpainted.then_some("it has neither fill nor stroke"));
        if let Some(why) = hidden {
            self.skip(kind, node, why, Weight::Harmless, around);
            return Ok(());
        }
        let subpaths = shape(node).map_err(|why| self.fault(node, kind, &why))?;
        for clip in ["clip-path", "mask"] {
            if property(node, clip).is_some_and(|value| value != "none") {
                self.skip(clip, node, "it is not applied; the whole shape is read", Weight::Harmless, around);
            }
        }
        for subpath in subpaths {
            self.sheet.paths.push(Path {
                kind,
                id: self.id(node),
                start: subpath.start,
                segments: subpath.segments,
                closed: subpath.closed,
            });
            self.sheet.place(self.sheet.paths.len() - 1, around.place, around.layer)?;
        }
        Ok(())
    }

    /// Elements that draw no line, or that are not read.
    fn other(&mut self, node: &Node<'_, '_>, kind: &str, around: &Around) {
        match kind {
            "text" => self.skip("text", node, "lettering", Weight::Harmless, around),
            "image" => self.skip("image", node, "a picture", Weight::Harmless, around),
            "defs" | "symbol" | "title" | "desc" | "metadata" | "style" | "script" | "view" | "clipPath" | "mask"
            | "pattern" | "marker" | "filter" | "linearGradient" | "radialGradient" | "animate" | "animateMotion"
            | "animateTransform" | "set" | "cursor" | "font" | "color-profile" | "solidcolor" => {}
            "switch" => self.skip("switch", node, "what it shows depends on the viewer", Weight::Missed, around),
            _ => self.skip(kind, node, "a kind of element this reader does not know", Weight::Missed, around),
        }
    }
}

/// A list of transforms as one map; nothing when it is not understood.
fn transform(text: &str) -> Option<Affine> {
    let mut place = Affine::IDENTITY;
    for token in TransformListParser::from(text) {
        place *= match token.ok()? {
            TransformListToken::Matrix { a, b, c, d, e, f } => Affine::new([a, b, c, d, e, f]),
            TransformListToken::Translate { tx, ty } => Affine::translate((tx, ty)),
            TransformListToken::Scale { sx, sy } => Affine::scale_non_uniform(sx, sy),
            TransformListToken::Rotate { angle } => super::super::curve::rotation(angle),
            TransformListToken::SkewX { angle } => Affine::new([1.0, 0.0, angle.to_radians().tan(), 1.0, 0.0, 0.0]),
            TransformListToken::SkewY { angle } => Affine::new([1.0, angle.to_radians().tan(), 0.0, 1.0, 0.0, 0.0]),
        };
    }
    Some(place).filter(|place| place.is_finite())
}
