//! DXF as group codes and values, from text or binary files, with the place of each in the file.
//!
//! A code says what type its value has; the ranges are those of the DXF reference ("Group Code Value Types").

use super::super::fault::{Fault, quoted};

/// What a binary DXF file begins with.
const SENTINEL: &[u8] = b"AutoCAD Binary DXF\r\n\x1a\0";

/// A value as it stands in the file. Text is not looked into before somebody asks for it.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) enum Value<'a> {
    /// Bytes of a line, or of a binary string.
    Text(&'a [u8]),
    /// A binary whole number.
    Whole(i64),
    /// A binary number.
    Real(f64),
    /// A binary chunk, which no outline needs.
    Chunk,
}

/// A group code and its value.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) struct Pair<'a> {
    /// Group code.
    pub(super) code: i32,
    /// Value.
    pub(super) value: Value<'a>,
    /// Where the value stands.
    pub(super) at: Place,
}

/// A place in a file: lines of a text, bytes of a binary file.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) enum Place {
    /// Line, from 1.
    Line(usize),
    /// Byte, from 0.
    Byte(usize),
}

impl Place {
    /// A fault here.
    pub(super) fn fault(self, text: impl Into<String>) -> Fault {
        let text = text.into();
        match self {
            Self::Line(line) => Fault { line: Some(line), text },
            Self::Byte(byte) => Fault { line: None, text: format!("at byte {byte}: {text}") },
        }
    }
}

impl<'a> Pair<'a> {
    /// True for a code of 0 with this word.
    pub(super) fn begins(&self, word: &str) -> bool {
        self.code == 0 && self.is(word)
    }

    /// True when the value is this word.
    pub(super) fn is(&self, word: &str) -> bool {
        matches!(self.value, Value::Text(bytes) if bytes.trim_ascii() == word.as_bytes())
    }

    /// The value as a finite number.
    pub(super) fn real(&self) -> Result<f64, Fault> {
        let number = match self.value {
            Value::Real(number) => Some(number),
            Value::Whole(number) => Some(number as f64),
            Value::Text(bytes) => std::str::from_utf8(bytes).ok().and_then(|text| text.trim().parse().ok()),
            Value::Chunk => None,
        };
        match (number, self.value) {
            (Some(number), _) if number.is_finite() => Ok(number),
            (Some(_), Value::Text(bytes)) => {
                Err(self.at.fault(format!("{} is not a number the drawing can mean", quoted(bytes))))
            }
            (Some(number), _) => Err(self.at.fault(format!("{number} is not a number the drawing can mean"))),
            (None, Value::Text(bytes)) if bytes.contains(&b',') => Err(self.at.fault(format!(
                "{} is no number; the format has decimal points, not commas: export the drawing again",
                quoted(bytes)
            ))),
            (None, Value::Text(bytes)) => Err(self.at.fault(format!("{} is no number", quoted(bytes)))),
            (None, _) => Err(self.at.fault("a number was expected")),
        }
    }

    /// The value as a whole number.
    pub(super) fn whole(&self) -> Result<i64, Fault> {
        match self.value {
            Value::Whole(number) => Ok(number),
            _ => {
                let number = self.real()?;
                if number.fract() == 0.0 && number.abs() < 9e15 {
                    Ok(number as i64)
                } else {
                    Err(self.at.fault(format!("{number} is no whole number")))
                }
            }
        }
    }

    /// The bytes of a text, without blanks around them.
    pub(super) fn text(&self) -> &'a [u8] {
        match self.value {
            Value::Text(bytes) => bytes.trim_ascii(),
            _ => b"",
        }
    }
}

/// The pairs of a file, one after another.
#[derive(Debug)]
pub(super) enum Pairs<'a> {
    /// Of a text file.
    Text(Lines<'a>),
    /// Of a binary file.
    Binary(Binary<'a>),
}

impl<'a> Pairs<'a> {
    /// Looks which kind of file it is.
    pub(super) fn of(bytes: &'a [u8]) -> Self {
        match bytes.strip_prefix(SENTINEL) {
            Some(rest) => {
                // From R13 a code has two bytes; the first pair is always 0 SECTION, so a second nought tells.
                let wide = rest.starts_with(&[0, 0]);
                Self::Binary(Binary { bytes, at: SENTINEL.len(), wide })
            }
            None => {
                let bytes = bytes.strip_prefix(b"\xef\xbb\xbf").unwrap_or(bytes);
                let ending = if bytes.contains(&b'\n') { b'\n' } else { b'\r' };
                Self::Text(Lines { rest: bytes, line: 0, ending })
            }
        }
    }

    /// True for a binary file.
    pub(super) fn is_binary(&self) -> bool {
        matches!(self, Self::Binary(_))
    }

    /// How many bytes are not read yet.
    pub(super) fn left(&self) -> usize {
        match self {
            Self::Text(lines) => lines.rest.len(),
            Self::Binary(binary) => binary.bytes.len() - binary.at,
        }
    }

    /// The next pair; nothing at the end of the file. Comments (code 999) are passed over.
    pub(super) fn next(&mut self) -> Result<Option<Pair<'a>>, Fault> {
        loop {
            let pair = match self {
                Self::Text(lines) => lines.next()?,
                Self::Binary(binary) => binary.next()?,
            };
            match pair {
                Some(Pair { code: 999, .. }) => {}
                other => return Ok(other),
            }
        }
    }
}

/// A text file: a line with the code, a line with the value.
#[derive(Debug)]
pub(super) struct Lines<'a> {
    rest: &'a [u8],
    line: usize,
    ending: u8,
}

impl<'a> Lines<'a> {
    fn line(&mut self) -> Option<&'a [u8]> {
        if self.rest.is_empty() {
            return None;
        }
        self.line += 1;
        let end = self.rest.iter().position(|&byte| byte == self.ending);
        let (line, rest) = match end {
            Some(end) => (&self.rest[..end], &self.rest[end + 1..]),
            None => (self.rest, &self.rest[..0]),
        };
        self.rest = rest;
        Some(line.strip_suffix(b"\r").unwrap_or(line))
    }

    fn next(&mut self) -> Result<Option<Pair<'a>>, Fault> {
        let Some(code) = self.line() else { return Ok(None) };
        let at = Place::Line(self.line);
        let code = code.trim_ascii();
        if code.is_empty() && self.rest.trim_ascii().is_empty() {
            self.rest = &[];
            return Ok(None);
        }
        let number = std::str::from_utf8(code).ok().and_then(|code| code.parse().ok());
        let Some(number) = number else {
            return Err(at.fault(format!("{} stands where a group code must; is this a DXF file?", quoted(code))));
        };
        let Some(value) = self.line() else {
            return Err(at.fault("the file ends between a group code and its value; it was cut short"));
        };
        Ok(Some(Pair { code: number, value: Value::Text(value), at: Place::Line(self.line) }))
    }
}

/// A binary file: codes of one byte up to R12 (255 announces a code of two), of two bytes from R13.
#[derive(Debug)]
pub(super) struct Binary<'a> {
    bytes: &'a [u8],
    at: usize,
    wide: bool,
}

impl<'a> Binary<'a> {
    fn take<const N: usize>(&mut self) -> Result<[u8; N], Fault> {
        let taken = self.bytes.get(self.at..).and_then(<[u8]>::first_chunk::<N>);
        let Some(&taken) = taken else {
            return Err(Place::Byte(self.at).fault("the file ends inside a value; it was cut short"));
        };
        self.at += N;
        Ok(taken)
    }

    fn next(&mut self) -> Result<Option<Pair<'a>>, Fault> {
        if self.at >= self.bytes.len() {
            return Ok(None);
        }
        let at = Place::Byte(self.at);
        let code = if self.wide {
            i32::from(i16::from_le_bytes(self.take()?))
        } else {
            match self.take::<1>()? {
                [255] => i32::from(i16::from_le_bytes(self.take()?)),
                [code] => i32::from(code),
            }
        };
        let value = match code {
            0..=9
            | 100..=109
            | 300..=309
            | 320..=369
            | 390..=399
            | 410..=419
            | 430..=439
            | 470..=481
            | 999..=1003
            | 1005..=1009 => {
                let rest = &self.bytes[self.at..];
                let Some(end) = rest.iter().position(|&byte| byte == 0) else {
                    return Err(at.fault("the file ends inside a text; it was cut short"));
                };
                self.at += end + 1;
                Value::Text(&rest[..end])
            }
            10..=59 | 110..=149 | 210..=239 | 460..=469 | 1010..=1059 => Value::Real(f64::from_le_bytes(self.take()?)),
            60..=79 | 170..=179 | 270..=289 | 370..=389 | 400..=409 | 1060..=1070 => {
                Value::Whole(i64::from(i16::from_le_bytes(self.take()?)))
            }
            90..=99 | 420..=429 | 440..=459 | 1071 => Value::Whole(i64::from(i32::from_le_bytes(self.take()?))),
            160..=169 => Value::Whole(i64::from_le_bytes(self.take()?)),
            290..=299 => {
                let [flag] = self.take()?;
                Value::Whole(i64::from(flag))
            }
            310..=319 | 1004 => {
                let [length] = self.take()?;
                if self.bytes.len() - self.at < usize::from(length) {
                    return Err(at.fault("the file ends inside a value; it was cut short"));
                }
                self.at += usize::from(length);
                Value::Chunk
            }
            _ => return Err(at.fault(format!("{code} is no group code; the file is damaged"))),
        };
        Ok(Some(Pair { code, value, at }))
    }
}
