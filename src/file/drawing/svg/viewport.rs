//! Lengths, viewBox and the size of a user unit.

use super::super::fault::{Fault, fault, short};
use super::super::sheet::Sheet;
use super::super::units::{Unit, unit_named as named};
use kurbo::Affine;
use roxmltree::Node;
use std::str::FromStr;
use svgtypes::{Align, AspectRatio, Length, LengthUnit, ViewBox};

/// A CSS pixel, mm (CSS Values and Units 4, section 6.2).
const PX_MM: f64 = 25.4 / 96.0;
/// Scales of x and y that differ by no more than this are the same, written with few digits.
const SAME_SCALE: f64 = 1e-3;

/// A length with a physical unit, mm.
fn physical_mm(length: Length) -> Option<f64> {
    let mm = match length.unit {
        LengthUnit::Mm => 1.0,
        LengthUnit::Cm => 10.0,
        LengthUnit::In => 25.4,
        LengthUnit::Pt => 25.4 / 72.0,
        LengthUnit::Pc => 25.4 / 6.0,
        _ => return None,
    };
    Some(length.number * mm).filter(|mm| *mm > 0.0)
}

/// A length in user units; nothing for one that depends on a font or on what is around.
pub(super) fn user_length(length: Length) -> Option<f64> {
    match length.unit {
        LengthUnit::None | LengthUnit::Px => Some(length.number),
        _ if length.number == 0.0 => Some(0.0),
        LengthUnit::Mm => Some(length.number / PX_MM),
        LengthUnit::Cm => Some(length.number * 10.0 / PX_MM),
        LengthUnit::In => Some(length.number * 96.0),
        LengthUnit::Pt => Some(length.number * 96.0 / 72.0),
        LengthUnit::Pc => Some(length.number * 16.0),
        LengthUnit::Em | LengthUnit::Ex | LengthUnit::Percent => None,
    }
}

/// The viewBox of an element.
pub(super) fn view_box(node: &Node<'_, '_>) -> Result<Option<ViewBox>, Fault> {
    let Some(text) = node.attribute("viewBox") else { return Ok(None) };
    let parsed = ViewBox::from_str(text)
        .ok()
        .filter(|b| [b.x, b.y, b.w, b.h].iter().all(|n| n.is_finite()) && b.w > 0.0 && b.h > 0.0);
    match parsed {
        Some(parsed) => Ok(Some(parsed)),
        None => Err(fault(format!("viewBox \"{}\" is not four numbers with a width and height above 0", short(text)))),
    }
}

/// From the coordinates of a viewBox to those of a viewport of this size at the origin.
pub(super) fn fit(node: &Node<'_, '_>, view: ViewBox, width: f64, height: f64) -> Result<Affine, Fault> {
    let aspect = match node.attribute("preserveAspectRatio") {
        None => AspectRatio::default(),
        Some(text) => AspectRatio::from_str(text)
            .map_err(|_| fault(format!("preserveAspectRatio \"{}\" is not understood", short(text))))?,
    };
    let (mut sx, mut sy) = (width / view.w, height / view.h);
    if aspect.align != Align::None {
        let scale = if aspect.slice { sx.max(sy) } else { sx.min(sy) };
        (sx, sy) = (scale, scale);
    }
    let share = |align: Align| match align {
        Align::XMinYMin | Align::None => (0.0, 0.0),
        Align::XMidYMin => (0.5, 0.0),
        Align::XMaxYMin => (1.0, 0.0),
        Align::XMinYMid => (0.0, 0.5),
        Align::XMidYMid => (0.5, 0.5),
        Align::XMaxYMid => (1.0, 0.5),
        Align::XMinYMax => (0.0, 1.0),
        Align::XMidYMax => (0.5, 1.0),
        Align::XMaxYMax => (1.0, 1.0),
    };
    let (x, y) = share(aspect.align);
    let room = ((width - sx * view.w) * x, (height - sy * view.h) * y);
    Ok(Affine::translate(room) * Affine::scale_non_uniform(sx, sy) * Affine::translate((-view.x, -view.y)))
}

/// Finds the size of a user unit, and turns y up: the lower left corner of the drawing becomes the origin where it is
/// known.
pub(super) fn units(root: &Node<'_, '_>, sheet: &mut Sheet) -> Result<(), Fault> {
    let length = |name: &str| root.attribute(name).map(|text| (text, Length::from_str(text).ok()));
    let (width, height) = (length("width"), length("height"));
    for (name, side) in [("width", &width), ("height", &height)] {
        if let Some((text, None)) = side
            && *text != "auto"
        {
            return Err(fault(format!("the {name} of the drawing, \"{}\", is no length", short(text))));
        }
    }
    let side_mm = |side: &Option<(&str, Option<Length>)>| side.and_then(|(_, length)| physical_mm(length?));
    let (width_mm, height_mm) = (side_mm(&width), side_mm(&height));
    let view = view_box(root)?;
    let bottom = match (view, height) {
        (Some(view), _) => Some((view.x, view.y + view.h)),
        (None, Some((_, Some(height)))) => user_length(height).map(|height| (0.0, height)),
        _ => None,
    };
    let (left, bottom) = bottom.filter(|(x, y)| x.is_finite() && y.is_finite()).unwrap_or((0.0, 0.0));
    let up = Affine::new([1.0, 0.0, 0.0, -1.0, 0.0 - left, bottom]);
    sheet.root = up;
    let mut state = |mm: f64, by| {
        let name = ["mm", "cm", "m", "in"].into_iter().find(|name| named(name).is_some_and(|unit| unit.mm == mm));
        sheet.stated = Some((Unit { name: name.unwrap_or("user unit"), mm }, by));
    };
    match (view, width_mm, height_mm) {
        (None, None, None) | (Some(_), None, None) => {
            let width = width.map_or("is not given".to_owned(), |(text, _)| format!("is \"{}\"", short(text)));
            sheet.unit_hint = format!("the drawing states no physical size (its width {width})");
        }
        (None, ..) => state(PX_MM, "a width or height without a viewBox: 1/96 in"),
        (Some(view), Some(width), None) => state(width / view.w, "width and viewBox"),
        (Some(view), None, Some(height)) => state(height / view.h, "height and viewBox"),
        (Some(view), Some(width), Some(height)) => {
            let fitted = fit(root, view, width, height)?.as_coeffs();
            let (sx, sy) = (fitted[0], fitted[3]);
            state(sx, "width, height and viewBox");
            if sx != sy {
                // Told apart on purpose: the drawing is stretched.
                sheet.root = Affine::scale_non_uniform(1.0, sy / sx) * up;
                sheet.notes.push(format!("the drawing is stretched: y by {} against x", sy / sx));
            }
            let (across, along) = (width / view.w, height / view.h);
            if sx == sy && (across - along).abs() > SAME_SCALE * across {
                sheet.notes.push(format!(
                    "width and height do not fit the viewBox ({across} and {along} mm for a unit); {sx} was taken, as \
                     preserveAspectRatio says"
                ));
            }
        }
    }
    if let Some((unit, _)) = sheet.stated
        && !(unit.mm.is_finite() && unit.mm > 0.0)
    {
        return Err(fault("the size of the drawing is no size; give it a width, a height and a viewBox"));
    }
    Ok(())
}
