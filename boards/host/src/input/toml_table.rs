//! TOML read key by key, each value with its place in the file, its range, and the keys that would have been accepted.

use std::ops::Range;

use toml::de::{DeTable, DeValue};

use crate::input::{
    nearest::did_you_mean,
    problem::{Problem, shown},
    toml_text::TomlText,
};

/// The values a number may have, both ends included.
#[derive(Clone, Copy, Debug)]
pub struct Limits {
    low: f64,
    high: f64,
    unit: &'static str,
}

impl Limits {
    /// States a range.
    ///
    /// * `low`, `high`: in the key's unit, both allowed
    /// * `unit`: for messages, empty for plain numbers
    pub const fn new(low: f64, high: f64, unit: &'static str) -> Self {
        Self { low, high, unit }
    }

    /// Says that a value is outside.
    fn refusal(self, value: f64) -> Option<String> {
        let unit = if self.unit.is_empty() { String::new() } else { format!(" {}", self.unit) };
        let outside = !(self.low..=self.high).contains(&value);
        outside.then(|| format!("{value}{unit} is outside {}{unit} to {}{unit}", self.low, self.high))
    }
}

/// One table of a TOML file.
///
/// ```
/// use evenbore_bench::input::{toml_table::{Limits, Section}, toml_text::TomlText};
/// let text = TomlText::new("element.toml", "bore_mm = 99.0");
/// let message = Section::top(&text)?.number("bore_mm", Limits::new(0.001, 50.0, "mm")).unwrap_err().to_string();
/// assert_eq!(message, "element.toml:1, column 11 (bore_mm): 99 mm is outside 0.001 mm to 50 mm");
/// # Ok::<(), evenbore_bench::input::problem::Problem>(())
/// ```
pub struct Section<'t> {
    source: &'t TomlText,
    name: String,
    at: usize,
    table: DeTable<'t>,
}

/// A value and where it stands.
struct Found<'s, 't> {
    value: &'s DeValue<'t>,
    span: Range<usize>,
}

impl<'t> Section<'t> {
    /// The table of a file's top level.
    ///
    /// * `source`: the file's text
    ///
    /// # Errors
    /// Where the text is not TOML.
    pub fn top(source: &'t TomlText) -> Result<Self, Problem> {
        match DeTable::parse(source.as_str()) {
            Ok(table) => Ok(Self { source, name: String::new(), at: 0, table: table.into_inner() }),
            Err(error) => Err(source.syntax(&error)),
        }
    }

    /// Name of the table; empty for the top level.
    pub fn name(&self) -> &str {
        &self.name
    }

    /// Refuses every key that is not in a list.
    ///
    /// * `keys`: the accepted ones
    ///
    /// # Errors
    /// Names the first other key, lists the accepted ones and says which was probably meant.
    pub fn accept(&self, keys: &[&str]) -> Result<(), Problem> {
        let unknown = |name: &str| !keys.contains(&name);
        let first = self.table.keys().filter(|key| unknown(key.get_ref())).min_by_key(|key| key.span().start);
        let Some(key) = first else {
            return Ok(());
        };
        let name = key.get_ref();
        let message = format!(
            "{} is not a key here: accepted are {}{}",
            shown(name.as_bytes()),
            keys.join(", "),
            did_you_mean(name, keys)
        );
        Err(self.source.problem(key.span().start, name, message))
    }

    /// Reads a number that must be there.
    ///
    /// * `key`: its key
    /// * `limits`: its range
    ///
    /// # Errors
    /// Where it is missing, no finite number, or outside the range.
    pub fn number(&self, key: &str, limits: Limits) -> Result<f64, Problem> {
        let value = self.optional_number(key, limits)?;
        value.ok_or_else(|| self.missing(key, "a number", limits))
    }

    /// Reads a number that may be missing.
    ///
    /// * `key`: its key
    /// * `limits`: its range
    ///
    /// # Errors
    /// Where it is no finite number or outside the range.
    pub fn optional_number(&self, key: &str, limits: Limits) -> Result<Option<f64>, Problem> {
        self.find(key).map(|found| self.number_in(key, &found, limits)).transpose()
    }

    /// Reads a whole number that must be there.
    ///
    /// * `key`: its key
    /// * `limits`: its range, within 0 to 4294967295
    ///
    /// # Errors
    /// Where it is missing, not whole, or outside the range.
    pub fn count(&self, key: &str, limits: Limits) -> Result<u32, Problem> {
        let value = self.number(key, limits)?;
        if value.fract() == 0.0 {
            Ok(value as u32)
        } else {
            Err(self.problem(key, format!("{value} is not a whole number")))
        }
    }

    /// Reads a text that must be there.
    ///
    /// * `key`: its key
    ///
    /// # Errors
    /// Where it is missing or not a text between quotation marks.
    pub fn text(&self, key: &str) -> Result<&str, Problem> {
        match self.find(key) {
            Some(Found { value: DeValue::String(text), .. }) => Ok(text),
            Some(found) => {
                Err(self.problem(key, format!("{} is not a text between quotation marks", self.quote(&found))))
            }
            None => Err(self.absent(key, "a text between quotation marks")),
        }
    }

    /// Reads a word out of a list.
    ///
    /// * `key`: its key
    /// * `words`: the accepted ones
    ///
    /// Returns the position in the list.
    ///
    /// # Errors
    /// Where it is missing or another word.
    pub fn choice(&self, key: &str, words: &[&str]) -> Result<usize, Problem> {
        if !self.has(key) {
            return Err(self.absent(key, &format!("one of {}", words.join(", "))));
        }
        let word = self.text(key)?;
        words.iter().position(|known| *known == word).ok_or_else(|| {
            let (word, accepted) = (shown(word.as_bytes()), words.join(", "));
            self.problem(key, format!("{word} is not one of {accepted}{}", did_you_mean(&word, words)))
        })
    }

    /// Reads a pair of numbers that must be there, such as `[15.0, 870.0]`.
    ///
    /// * `key`: its key
    /// * `limits`: the ranges of the two
    ///
    /// # Errors
    /// Where it is missing, no pair, or outside the ranges.
    pub fn pair(&self, key: &str, limits: [Limits; 2]) -> Result<[f64; 2], Problem> {
        let found = self.find(key).ok_or_else(|| self.absent(key, "a pair of numbers, such as [15.0, 870.0]"))?;
        self.pair_in(key, &found, limits)
    }

    /// Reads two pairs of numbers that must be there, such as `[[40.0, 32.0], [100.0, 5.4]]`.
    ///
    /// * `key`: its key
    /// * `limits`: the ranges of the two numbers in each pair
    ///
    /// # Errors
    /// Where it is missing, not two pairs, or outside the ranges.
    pub fn two_pairs(&self, key: &str, limits: [Limits; 2]) -> Result<[[f64; 2]; 2], Problem> {
        let expected = "two pairs of numbers, such as [[40.0, 32.0], [100.0, 5.4]]";
        let found = self.find(key).ok_or_else(|| self.absent(key, expected))?;
        let [first, second] = self.two_in(key, &found, expected)?;
        Ok([self.pair_in(key, &first, limits)?, self.pair_in(key, &second, limits)?])
    }

    /// Whether a key is there.
    ///
    /// * `key`: the key
    pub fn has(&self, key: &str) -> bool {
        self.table.contains_key(key)
    }

    /// Takes the table apart into its own tables, in the order of the file.
    ///
    /// # Errors
    /// Where a key holds anything but a table.
    pub fn into_tables(self) -> Result<Vec<Self>, Problem> {
        let source = self.source;
        let mut tables = Vec::new();
        for (key, value) in self.table {
            let (at, name) = (key.span().start, key.into_inner().into_owned());
            let DeValue::Table(table) = value.into_inner() else {
                let message = format!(
                    "{} is not a table: a line [{name}] with keys below it was expected",
                    shown(name.as_bytes())
                );
                return Err(source.problem(at, &name, message));
            };
            tables.push(Self { source, name, at, table });
        }
        tables.sort_by_key(|table| table.at);
        Ok(tables)
    }

    /// Takes the table under a key out of this one; none if the key is not there.
    ///
    /// * `key`: as in the file, `[key]` or `key = {...}`
    ///
    /// # Errors
    /// Names a value that is no table.
    pub fn take(&mut self, key: &str) -> Result<Option<Self>, Problem> {
        if self.has(key) && !matches!(self.find(key), Some(Found { value: DeValue::Table(_), .. })) {
            return Err(self.problem(key, format!("a table [{key}] with keys below it was expected")));
        }
        let (source, at) = (self.source, self.find(key).map_or(self.at, |found| found.span.start));
        let table = |value| match value {
            DeValue::Table(table) => Some(Self { source, name: key.to_owned(), at, table }),
            _ => None,
        };
        Ok(self.table.remove(key).and_then(|value| table(value.into_inner())))
    }

    /// Takes the tables `[[key]]` out of this one, in the order of the file; none if there are none.
    ///
    /// * `key`: as in the file
    ///
    /// # Errors
    /// Names a value that is no table.
    pub fn take_each(&mut self, key: &str) -> Result<Vec<Self>, Problem> {
        let wrong = self.problem(key, format!("tables under lines [[{key}]] were expected"));
        let source = self.source;
        let Some(value) = self.table.remove(key) else { return Ok(Vec::new()) };
        let DeValue::Array(array) = value.into_inner() else { return Err(wrong) };
        let mut tables = Vec::new();
        for entry in array {
            let at = entry.span().start;
            let DeValue::Table(table) = entry.into_inner() else { return Err(wrong) };
            tables.push(Self { source, name: key.to_owned(), at, table });
        }
        Ok(tables)
    }

    /// A number, or a pair of numbers for a way from one to the other; none if the key is not there.
    ///
    /// * `key`: as in the file
    /// * `limits`: of each number
    ///
    /// # Errors
    /// Names a value that is neither, or outside its limits.
    pub fn optional_way(&self, key: &str, limits: Limits) -> Result<Option<[f64; 2]>, Problem> {
        match self.find(key) {
            None => Ok(None),
            Some(found @ Found { value: DeValue::Array(_), .. }) => self.pair_in(key, &found, [limits; 2]).map(Some),
            Some(found) => self.number_in(key, &found, limits).map(|value| Some([value; 2])),
        }
    }

    /// States a problem with the value of a key, or with the table where the key is missing.
    ///
    /// * `key`: the key
    /// * `message`: the value found and what was expected
    pub fn problem(&self, key: &str, message: impl Into<String>) -> Problem {
        let at = self.find(key).map_or(self.at, |found| found.span.start);
        self.source.problem(at, key, message)
    }

    /// Says that a key is missing.
    ///
    /// * `key`: the key
    /// * `expected`: what it should hold
    pub fn absent(&self, key: &str, expected: &str) -> Problem {
        let place = if self.name.is_empty() { String::new() } else { format!(" in [{}]", self.name) };
        self.problem(key, format!("the key is missing{place}: {expected} was expected")).at_column(1, key)
    }

    /// Says that a number is missing and in what range it was expected.
    fn missing(&self, key: &str, what: &str, limits: Limits) -> Problem {
        let Limits { low, high, unit } = limits;
        self.absent(key, format!("{what} from {low} to {high} {unit}").trim_end())
    }

    /// The value of a key.
    fn find(&self, key: &str) -> Option<Found<'_, 't>> {
        self.table.get(key).map(|value| Found { value: value.get_ref(), span: value.span() })
    }

    /// Takes a value as a number within limits.
    fn number_in(&self, key: &str, found: &Found<'_, 't>, limits: Limits) -> Result<f64, Problem> {
        let at = |message: String| self.source.problem(found.span.start, key, message);
        let value = plain_number(found.value).filter(|value| value.is_finite());
        let value = value.ok_or_else(|| at(format!("{} is not a finite number", self.quote(found))))?;
        limits.refusal(value).map_or(Ok(value), |message| Err(at(message)))
    }

    /// Takes a value as a pair of numbers within limits.
    fn pair_in(&self, key: &str, found: &Found<'_, 't>, limits: [Limits; 2]) -> Result<[f64; 2], Problem> {
        let [first, second] = self.two_in(key, found, "a pair of numbers, such as [15.0, 870.0]")?;
        Ok([self.number_in(key, &first, limits[0])?, self.number_in(key, &second, limits[1])?])
    }

    /// Takes a value as a list of two.
    fn two_in<'s>(&self, key: &str, found: &Found<'s, 't>, expected: &str) -> Result<[Found<'s, 't>; 2], Problem> {
        if let DeValue::Array(array) = found.value
            && let [first, second] = &array[..]
        {
            return Ok([first, second].map(|value| Found { value: value.get_ref(), span: value.span() }));
        }
        Err(self.source.problem(found.span.start, key, format!("{} is not {expected}", self.quote(found))))
    }

    /// The text of a value.
    fn quote(&self, found: &Found<'_, 't>) -> String {
        shown(self.source.as_str().get(found.span.clone()).unwrap_or_default().as_bytes())
    }
}

/// A TOML value as a number, finite or not.
fn plain_number(value: &DeValue<'_>) -> Option<f64> {
    match value {
        DeValue::Float(float) => float.as_str().parse().ok(),
        DeValue::Integer(whole) => i64::from_str_radix(whole.as_str(), whole.radix()).ok().map(|whole| whole as f64),
        _ => None,
    }
}
