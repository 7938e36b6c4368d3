//! A reader over TOML with spans: typed getters that note a fault with its line and go on, so that one reading lists
//! every fault of a file. The keys asked for are the schema; a key nobody asked for is a fault.

use super::{FileFault, FileFaults, shown};
use std::cell::{Cell, RefCell};
use std::collections::BTreeMap;
use std::path::Path;
use toml::Spanned;
use toml::de::{DeArray, DeTable, DeValue};

/// Faults listed before giving up.
const MOST_FAULTS: usize = 20;
/// Faults gathered before the rest is not even looked at; more than are listed, because they are sorted by line first.
const MOST_GATHERED: usize = 1000;
/// Characters of a file's own text quoted in a message.
const MOST_QUOTED: usize = 60;

/// The text of a file, its lines, and what was found wrong with it.
pub(super) struct Sheet<'t> {
    text: &'t str,
    line_starts: Vec<usize>,
    faults: RefCell<Vec<FileFault>>,
    notes: RefCell<Vec<FileFault>>,
    more: Cell<bool>,
}

impl<'t> Sheet<'t> {
    fn new(text: &'t str) -> Self {
        let line_starts = std::iter::once(0).chain(text.match_indices('\n').map(|(at, _)| at + 1)).collect();
        Self {
            text,
            line_starts,
            faults: RefCell::new(Vec::new()),
            notes: RefCell::new(Vec::new()),
            more: Cell::new(false),
        }
    }

    /// Line, from 1, of a byte offset.
    fn line(&self, offset: usize) -> usize {
        self.line_starts.partition_point(|&start| start <= offset)
    }

    /// Column in characters, from 1.
    fn column(&self, offset: usize) -> usize {
        let start = self.line_starts[self.line(offset).saturating_sub(1)];
        self.text.get(start..offset).map_or(1, |before| before.chars().count() + 1)
    }

    /// Notes a fault at a byte offset, or of the whole file.
    pub(super) fn fault(&self, offset: Option<usize>, text: impl AsRef<str>) {
        let mut faults = self.faults.borrow_mut();
        if faults.len() >= MOST_GATHERED {
            self.more.set(true);
        } else {
            faults.push(FileFault { line: offset.map(|at| self.line(at)), text: shown(text.as_ref()) });
        }
    }

    /// Says that there is more wrong than is listed.
    pub(super) fn and_more(&self) {
        self.more.set(true);
    }

    /// Notes something worth knowing that is no fault.
    pub(super) fn note(&self, offset: Option<usize>, text: impl AsRef<str>) {
        let line = offset.map(|at| self.line(at));
        self.notes.borrow_mut().push(FileFault { line, text: shown(text.as_ref()) });
    }

    fn is_sound(&self) -> bool {
        self.faults.borrow().is_empty()
    }

    fn into_faults(self) -> Vec<FileFault> {
        let mut faults = self.faults.into_inner();
        faults.sort_by_key(|fault| fault.line);
        faults.dedup();
        if faults.len() > MOST_FAULTS {
            faults.truncate(MOST_FAULTS);
            self.more.set(true);
        }
        if self.more.get() {
            faults.push(FileFault { line: None, text: "and more; mend these first".to_owned() });
        }
        faults
    }
}

/// Reads a TOML text of `schema = 1`: `build` asks the root table for its keys and makes the result.
///
/// # Errors
/// Every fault of syntax; when there is none, every other fault, sorted by line.
pub(super) fn read<T>(
    path: &Path,
    text: &str,
    build: impl FnOnce(&Table<'_>) -> Option<T>,
) -> Result<(T, Vec<FileFault>), FileFaults> {
    let sheet = Sheet::new(text);
    let (root, errors) = DeTable::parse_recoverable(text);
    let mut last = None;
    for error in &errors {
        let at = error.span().map(|span| span.start.min(text.len()));
        let line = at.map(|at| sheet.line(at));
        // Recovery within one line only repeats itself.
        if line.is_some() && line == last {
            continue;
        }
        last = line;
        let place = at.map_or(String::new(), |at| format!("column {}: ", sheet.column(at)));
        sheet.fault(at, format!("{place}not TOML: {}", error.message()));
    }
    let mut built = None;
    if errors.is_empty() {
        let table = Table::new(&sheet, root.get_ref(), None, String::new());
        match table.whole("schema") {
            Some(1) => {}
            Some(other) => table.fault("schema", format!("`schema` is {other}; this program reads schema 1")),
            None if table.get("schema").is_none() => {
                sheet.fault(None, "`schema` is missing; write `schema = 1` at the top");
            }
            None => {}
        }
        built = build(&table);
        table.finish();
    }
    match built {
        Some(built) if sheet.is_sound() => Ok((built, sheet.notes.into_inner())),
        _ => Err(FileFaults { path: path.to_owned(), faults: sheet.into_faults() }),
    }
}

/// One table of the file.
pub(super) struct Table<'a> {
    sheet: &'a Sheet<'a>,
    table: &'a DeTable<'a>,
    /// Where the table stands; nothing for the root.
    at: Option<usize>,
    /// Its name with a dot behind it; empty for the root.
    prefix: String,
    /// Keys asked for so far, each with the words for what it takes.
    asked: RefCell<BTreeMap<&'static str, ()>>,
}

impl<'a> Table<'a> {
    fn new(sheet: &'a Sheet<'a>, table: &'a DeTable<'a>, at: Option<usize>, prefix: String) -> Self {
        Self { sheet, table, at, prefix, asked: RefCell::default() }
    }

    /// The file.
    pub(super) fn sheet(&self) -> &'a Sheet<'a> {
        self.sheet
    }

    /// Where the table stands.
    pub(super) fn at(&self) -> Option<usize> {
        self.at
    }

    /// The raw value of a key.
    pub(super) fn get(&self, key: &'static str) -> Option<&'a Spanned<DeValue<'a>>> {
        self.asked.borrow_mut().insert(key, ());
        self.table.get(key)
    }

    /// Where a key stands; where the table does when the key is absent.
    pub(super) fn place(&self, key: &str) -> Option<usize> {
        self.table.get_key_value(key).map(|(key, _)| key.span().start).or(self.at)
    }

    /// Where the value at a dotted path below this table stands, as far as the path leads.
    pub(super) fn place_of_path(&self, path: &str) -> Option<usize> {
        let mut place = self.at;
        let mut table = self.table;
        let mut steps = path.split('.');
        while let Some(step) = steps.next() {
            let Some((key, value)) = table.get_key_value(step) else { break };
            place = Some(key.span().start);
            match value.get_ref() {
                DeValue::Table(inner) => table = inner,
                DeValue::Array(entries) => {
                    let entry = steps.next().and_then(|number| entries.get(number.parse::<usize>().ok()?));
                    let Some(entry) = entry else { break };
                    place = Some(entry.span().start);
                    let Some(inner) = entry.get_ref().as_table() else { break };
                    table = inner;
                }
                _ => break,
            }
        }
        place
    }

    /// True when the key is there, whatever its value.
    pub(super) fn has(&self, key: &str) -> bool {
        self.table.contains_key(key)
    }

    /// Notes a fault at a key.
    pub(super) fn fault(&self, key: &str, text: impl AsRef<str>) {
        self.sheet.fault(self.place(key), text);
    }

    /// The key's full name in back quotes.
    pub(super) fn named(&self, key: &str) -> String {
        format!("`{}{}`", self.prefix, key)
    }

    /// Notes a fault when a key is absent.
    pub(super) fn require(&self, key: &'static str, mend: &str) {
        if self.get(key).is_none() {
            self.sheet.fault(self.at, format!("{} is missing; {mend}", self.named(key)));
        }
    }

    fn typed<T>(&self, key: &'static str, want: &str, read: impl FnOnce(&'a DeValue<'a>) -> Option<T>) -> Option<T> {
        let value = self.get(key)?;
        let read = read(value.get_ref());
        if read.is_none() {
            self.sheet.fault(
                Some(value.span().start),
                format!("{} is {}; give {want}", self.named(key), described(value.get_ref())),
            );
        }
        read
    }

    /// A finite number.
    pub(super) fn number(&self, key: &'static str) -> Option<f64> {
        self.typed(key, "a finite number", finite)
    }

    /// A whole number from 0 up.
    pub(super) fn whole(&self, key: &'static str) -> Option<u64> {
        self.typed(key, "a whole number from 0 up", whole)
    }

    /// A whole number from 0 up that can count things here.
    pub(super) fn index(&self, key: &'static str) -> Option<usize> {
        self.typed(key, "a whole number from 0 up", |value| usize::try_from(whole(value)?).ok())
    }

    /// A text.
    pub(super) fn text(&self, key: &'static str) -> Option<String> {
        self.typed(key, "a text in quotes", |value| value.as_str().map(str::to_owned))
    }

    /// A point in time with its offset, as a TOML date-time.
    pub(super) fn time(&self, key: &'static str) -> Option<jiff::Timestamp> {
        self.typed(key, "a date and time with offset, such as 2026-01-31T12:00:00Z", |value| {
            value.as_datetime()?.to_string().parse().ok()
        })
    }

    /// So many finite numbers in a list.
    pub(super) fn numbers<const N: usize>(&self, key: &'static str) -> Option<[f64; N]> {
        self.typed(key, &format!("a list of {N} finite numbers"), |value| numbers(value.as_array()?))
    }

    /// A list of texts.
    pub(super) fn texts(&self, key: &'static str) -> Option<Vec<String>> {
        self.typed(key, "a list of texts in quotes", |value| {
            value.as_array()?.iter().map(|text| text.get_ref().as_str().map(str::to_owned)).collect()
        })
    }

    /// Yes or no.
    pub(super) fn flag(&self, key: &'static str) -> Option<bool> {
        self.typed(key, "true or false", DeValue::as_bool)
    }

    /// A list of lists of so many finite numbers.
    pub(super) fn rows<const N: usize>(&self, key: &'static str) -> Option<Vec<[f64; N]>> {
        self.typed(key, &format!("a list of lists of {N} finite numbers"), |value| {
            value.as_array()?.iter().map(|row| numbers(row.get_ref().as_array()?)).collect()
        })
    }

    /// One of a few words.
    pub(super) fn word<T: Copy>(&self, key: &'static str, words: &[(&str, T)]) -> Option<T> {
        let wanted = words.iter().map(|(word, _)| format!("\"{word}\"")).collect::<Vec<_>>().join(" or ");
        self.typed(key, &wanted, |value| {
            let said = value.as_str()?;
            words.iter().find(|(word, _)| *word == said).map(|(_, meaning)| *meaning)
        })
    }

    /// A table within this one.
    pub(super) fn table(&self, key: &'static str) -> Option<Self> {
        let at = self.place(key);
        let inner = self.typed(key, "a table", DeValue::as_table)?;
        Some(Self::new(self.sheet, inner, at, format!("{}{key}.", self.prefix)))
    }

    /// The entries of an array of tables; none when the key is absent.
    pub(super) fn tables(&self, key: &'static str) -> Vec<Self> {
        let Some(entries) = self.typed(key, &format!("tables headed [[{}{key}]]", self.prefix), DeValue::as_array)
        else {
            return Vec::new();
        };
        let mut tables = Vec::with_capacity(entries.len());
        for (number, entry) in entries.iter().enumerate() {
            match entry.get_ref().as_table() {
                Some(inner) => {
                    let prefix = format!("{}{key}.{number}.", self.prefix);
                    tables.push(Self::new(self.sheet, inner, Some(entry.span().start), prefix));
                }
                None => self.sheet.fault(
                    Some(entry.span().start),
                    format!(
                        "entry {number} of {} is {}; give a table headed [[{}{key}]]",
                        self.named(key),
                        described(entry.get_ref()),
                        self.prefix
                    ),
                ),
            }
        }
        tables
    }

    /// Reports every key that was not asked for, with the nearest one that would have been.
    pub(super) fn finish(self) {
        let asked = self.asked.borrow();
        for (key, _) in self.table.iter() {
            let name: &str = key.get_ref();
            if asked.contains_key(name) {
                continue;
            }
            let mend = match nearest(name, asked.keys().copied()) {
                Some(known) => format!("did you mean `{known}`?"),
                None => format!("known here: {}", asked.keys().copied().collect::<Vec<_>>().join(", ")),
            };
            self.sheet.fault(Some(key.span().start), format!("unknown key `{}{}`; {mend}", self.prefix, clipped(name)));
        }
    }
}

/// The known word nearest to what was written, if any is near enough to be meant.
pub(super) fn nearest<'k>(written: &str, known: impl Iterator<Item = &'k str>) -> Option<&'k str> {
    let written = written.to_lowercase();
    known
        .map(|word| (word, strsim::jaro_winkler(&written, word)))
        .filter(|&(_, likeness)| likeness > 0.75)
        .max_by(|a, b| a.1.total_cmp(&b.1))
        .map(|(word, _)| word)
}

/// A finite number, whole or not.
pub(super) fn finite(value: &DeValue<'_>) -> Option<f64> {
    number(value).filter(|x| x.is_finite())
}

/// A number, whole or not; a number too large for a double is infinite.
pub(super) fn number(value: &DeValue<'_>) -> Option<f64> {
    match value {
        DeValue::Float(float) => float.as_str().parse().ok(),
        DeValue::Integer(integer) if integer.radix() == 10 => integer.as_str().parse().ok(),
        DeValue::Integer(integer) => {
            i128::from_str_radix(integer.as_str(), integer.radix()).ok().map(|whole| whole as f64)
        }
        _ => None,
    }
}

fn whole(value: &DeValue<'_>) -> Option<u64> {
    let integer = value.as_integer()?;
    u64::from_str_radix(integer.as_str(), integer.radix()).ok()
}

fn numbers<const N: usize>(list: &DeArray<'_>) -> Option<[f64; N]> {
    if list.len() != N {
        return None;
    }
    let mut numbers = [0.0; N];
    for (number, value) in numbers.iter_mut().zip(list.iter()) {
        *number = finite(value.get_ref())?;
    }
    Some(numbers)
}

/// What a value is, in words, with the value itself when it is short.
pub(super) fn described(value: &DeValue<'_>) -> String {
    match value {
        DeValue::String(text) => format!("the text \"{}\"", clipped(text)),
        DeValue::Integer(integer) => clipped(&integer.to_string()),
        DeValue::Float(float) => clipped(float.as_str()),
        DeValue::Boolean(yes) => yes.to_string(),
        DeValue::Datetime(time) => format!("the date {time}"),
        DeValue::Array(list) => match list.len() {
            1 => "a list of 1 entry".to_owned(),
            n => format!("a list of {n} entries"),
        },
        DeValue::Table(_) => "a table".to_owned(),
    }
}

fn clipped(text: &str) -> String {
    match text.char_indices().nth(MOST_QUOTED) {
        Some((end, _)) => format!("{}...", &text[..end]),
        None => text.to_owned(),
    }
}
