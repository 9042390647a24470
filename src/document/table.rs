//! One table of a document: typed getters that note what is missing, wrong or unknown.

use super::{At, Document, Problem, Span};
use crate::units::{Quantity, Unit, UnitError, parse_duration, parse_fraction, parse_quantity};
use jiff::civil::Date;
use std::collections::BTreeSet;
use std::time::Duration;
use toml::Spanned;
use toml::de::{DeTable, DeValue};

/// A table of a document. On drop it notes every key that was never asked for.
pub struct Table<'d, 't> {
    document: &'d Document<'t>,
    path: String,
    header: Span,
    entries: &'d DeTable<'t>,
    asked: BTreeSet<String>,
}

impl<'d, 't> Table<'d, 't> {
    pub(super) fn new(
        document: &'d Document<'t>,
        path: String,
        header: Span,
        entries: &'d DeTable<'t>,
    ) -> Self {
        Self { document, path, header, entries, asked: BTreeSet::new() }
    }

    /// Notes a problem with `value`, found by looking at it or by comparing it with others. The message begins with
    /// its key and its text.
    pub fn problem<T>(&self, value: &At<T>, what: &str) {
        self.note(value.span.clone(), format!("{value}: {what}"));
    }

    /// Notes a problem of the table as a whole.
    pub fn problem_here(&self, message: String) {
        self.note(self.header.clone(), message);
    }

    /// A required quantity with its unit in the text.
    pub fn quantity<Q: Quantity>(&mut self, key: &str) -> Option<At<Q>> {
        self.required(key, &wanted(Q::UNIT))?;
        self.optional_quantity(key)
    }

    /// A quantity that may be left out.
    pub fn optional_quantity<Q: Quantity>(&mut self, key: &str) -> Option<At<Q>> {
        self.unit_text(key, Q::UNIT, |text| parse_quantity(text, Q::UNIT).map(Q::from_si))
    }

    /// A value of `unit` in SI units that may be left out; for keys whose unit is known only when the file is read.
    pub fn optional_value(&mut self, key: &str, unit: Unit) -> Option<At<f64>> {
        self.unit_text(key, unit, |text| parse_quantity(text, unit))
    }

    /// A required time.
    pub fn duration(&mut self, key: &str) -> Option<At<Duration>> {
        self.required(key, &wanted(Unit::Second))?;
        self.optional_duration(key)
    }

    /// A time that may be left out.
    pub fn optional_duration(&mut self, key: &str) -> Option<At<Duration>> {
        self.unit_text(key, Unit::Second, parse_duration)
    }

    /// A required share in per cent, as a fraction of one.
    pub fn fraction(&mut self, key: &str) -> Option<At<f64>> {
        self.required(key, &wanted(Unit::Percent))?;
        self.optional_fraction(key)
    }

    /// A share in per cent that may be left out.
    pub fn optional_fraction(&mut self, key: &str) -> Option<At<f64>> {
        self.unit_text(key, Unit::Percent, parse_fraction)
    }

    /// A required text.
    pub fn text(&mut self, key: &str) -> Option<At<String>> {
        self.text_for(key, "a text in quotes")
    }

    /// A required text of which the message for a missing one says what it is for.
    pub fn text_for(&mut self, key: &str, wanted: &str) -> Option<At<String>> {
        self.required(key, wanted)?;
        self.optional_text(key)
    }

    /// A text that may be left out.
    pub fn optional_text(&mut self, key: &str) -> Option<At<String>> {
        let value = self.look(key)?;
        match value.get_ref().as_str() {
            Some(text) => Some(self.at(key, value, text.to_owned())),
            None => self.wrong_type(key, value, "a text in quotes"),
        }
    }

    /// A required whole number.
    pub fn integer(&mut self, key: &str) -> Option<At<i64>> {
        self.required(key, "a whole number")?;
        self.optional_integer(key)
    }

    /// A whole number that may be left out.
    pub fn optional_integer(&mut self, key: &str) -> Option<At<i64>> {
        let value = self.look(key)?;
        let number =
            value.get_ref().as_integer().and_then(|n| i64::from_str_radix(n.as_str(), n.radix()).ok());
        match number {
            Some(number) => Some(self.at(key, value, number)),
            None => self.wrong_type(key, value, "a whole number"),
        }
    }

    /// A plain number without a unit, such as a ratio, that may be left out.
    pub fn optional_number(&mut self, key: &str) -> Option<At<f64>> {
        let value = self.look(key)?;
        let whole = || value.get_ref().as_integer().map(|number| number.as_str());
        let text = value.get_ref().as_float().map(|number| number.as_str()).or_else(whole);
        match text
            .and_then(|text| text.replace('_', "").parse::<f64>().ok())
            .filter(|number| number.is_finite())
        {
            Some(number) => Some(self.at(key, value, number)),
            None => self.wrong_type(key, value, "a number without quotes"),
        }
    }

    /// One of a few whole numbers, each standing for a value; required.
    pub fn integer_choice<T: Copy>(&mut self, key: &str, choices: &[(i64, T)]) -> Option<At<T>> {
        let wanted = any_of(choices.iter().map(|(number, _)| number.to_string()));
        self.required(key, &wanted)?;
        let number = self.optional_integer(key)?;
        let Some((_, value)) = choices.iter().find(|(choice, _)| *choice == number.value) else {
            self.problem(&number, &format!("wanted {wanted}"));
            return None;
        };
        Some(number.with(*value))
    }

    /// True or false, may be left out.
    pub fn optional_boolean(&mut self, key: &str) -> Option<At<bool>> {
        let value = self.look(key)?;
        match value.get_ref().as_bool() {
            Some(read) => Some(self.at(key, value, read)),
            None => self.wrong_type(key, value, "true or false, without quotes"),
        }
    }

    /// A date that may be left out: `2027-03-31`, with or without quotes.
    pub fn optional_date(&mut self, key: &str) -> Option<At<Date>> {
        let wanted = "a date such as 2027-03-31";
        let value = self.look(key)?;
        let text = match value.get_ref() {
            DeValue::String(text) => text.to_string(),
            DeValue::Datetime(date) => date.to_string(),
            _ => return self.wrong_type(key, value, wanted),
        };
        match text.parse::<Date>() {
            Ok(date) if text.len() == "2027-03-31".len() => Some(self.at(key, value, date)),
            _ => {
                self.problem(&self.at(key, value, ()), &format!("wanted {wanted}"));
                None
            }
        }
    }

    /// A required list of texts.
    pub fn texts(&mut self, key: &str) -> Option<At<Vec<At<String>>>> {
        self.required(key, "a list of texts")?;
        self.optional_texts(key)
    }

    /// A list of texts that may be left out.
    pub fn optional_texts(&mut self, key: &str) -> Option<At<Vec<At<String>>>> {
        let value = self.look(key)?;
        let Some(array) = value.get_ref().as_array() else {
            return self.wrong_type(key, value, "a list of texts");
        };
        let mut texts = Vec::new();
        for item in array.iter() {
            match item.get_ref().as_str() {
                Some(text) => texts.push(self.at(key, item, text.to_owned())),
                None => return self.wrong_type(key, item, "a text in quotes"),
            }
        }
        Some(self.at(key, value, texts))
    }

    /// One of a few words, each standing for a value; required.
    pub fn choice<T: Copy>(&mut self, key: &str, choices: &[(&str, T)]) -> Option<At<T>> {
        self.required(key, &one_of(choices.iter().map(|(word, _)| *word)))?;
        self.optional_choice(key, choices)
    }

    /// One of a few words, which may be left out.
    pub fn optional_choice<T: Copy>(&mut self, key: &str, choices: &[(&str, T)]) -> Option<At<T>> {
        let text = self.optional_text(key)?;
        let Some((_, value)) = choices.iter().find(|(word, _)| *word == text.value) else {
            self.problem(&text, &format!("wanted {}", one_of(choices.iter().map(|(word, _)| *word))));
            return None;
        };
        Some(text.with(*value))
    }

    /// A required table.
    pub fn table(&mut self, key: &str) -> Option<Table<'d, 't>> {
        self.required(key, "a table")?;
        self.optional_table(key)
    }

    /// A table that may be left out.
    pub fn optional_table(&mut self, key: &str) -> Option<Table<'d, 't>> {
        let value = self.look(key)?;
        match value.get_ref().as_table() {
            Some(entries) => Some(Table::new(self.document, self.name_of(key), value.span(), entries)),
            None => self.wrong_type(key, value, "a table"),
        }
    }

    /// The tables of a required list such as `[[range]]`; empty when a problem was noted.
    pub fn tables(&mut self, key: &str) -> Vec<Table<'d, 't>> {
        let wanted = format!("at least one [[{}]]", self.name_of(key));
        self.required(key, &wanted);
        let Some(value) = self.look(key) else { return Vec::new() };
        let Some(array) = value.get_ref().as_array() else {
            self.wrong_type::<()>(key, value, &wanted);
            return Vec::new();
        };
        if array.is_empty() {
            self.problem(&self.at(key, value, ()), &format!("wanted {wanted}"));
        }
        let mut tables = Vec::new();
        for (index, item) in array.iter().enumerate() {
            match item.get_ref().as_table() {
                Some(entries) => {
                    let path = format!("{}[{}]", self.name_of(key), index + 1);
                    tables.push(Table::new(self.document, path, item.span(), entries));
                }
                None => {
                    self.wrong_type::<()>(key, item, "a table");
                }
            }
        }
        tables
    }

    /// The tables of a list that may be left out; empty then, or when a problem was noted.
    pub fn optional_tables(&mut self, key: &str) -> Vec<Table<'d, 't>> {
        if self.look(key).is_some() { self.tables(key) } else { Vec::new() }
    }

    /// True when the writer gave this key, whatever stands there.
    pub fn has(&self, key: &str) -> bool {
        self.entries.contains_key(key)
    }

    fn look(&mut self, key: &str) -> Option<&'d Spanned<DeValue<'t>>> {
        self.asked.insert(key.to_owned());
        self.entries.get(key)
    }

    fn required(&mut self, key: &str, wanted: &str) -> Option<()> {
        if self.look(key).is_some() {
            return Some(());
        }
        self.problem_here(format!("{} has no key \"{key}\"; wanted {wanted}", self.place()));
        None
    }

    fn unit_text<T>(
        &mut self,
        key: &str,
        unit: Unit,
        parse: impl FnOnce(&str) -> Result<T, UnitError>,
    ) -> Option<At<T>> {
        let value = self.look(key)?;
        let Some(text) = value.get_ref().as_str() else {
            return self.wrong_type(key, value, &format!("{} in quotes", wanted(unit)));
        };
        match parse(text) {
            Ok(read) => Some(self.at(key, value, read)),
            Err(error) => {
                self.note(value.span(), format!("{}: {error}", self.name_of(key)));
                None
            }
        }
    }

    fn wrong_type<T>(&self, key: &str, value: &Spanned<DeValue<'t>>, wanted: &str) -> Option<T> {
        let read = with_article(value.get_ref().type_str());
        self.note(value.span(), format!("{}: read {read}, wanted {wanted}", self.name_of(key)));
        None
    }

    fn at<T>(&self, key: &str, value: &Spanned<DeValue<'t>>, read: T) -> At<T> {
        let span = value.span();
        let written = self.document.text.get(span.clone()).and_then(|text| text.lines().next());
        At { value: read, key: self.name_of(key), written: written.unwrap_or_default().to_owned(), span }
    }

    fn note(&self, span: Span, message: String) {
        self.document.note(Problem::new(span, message));
    }

    fn place(&self) -> String {
        if self.path.is_empty() { "the file".to_owned() } else { format!("[{}]", self.path) }
    }

    fn name_of(&self, key: &str) -> String {
        if self.path.is_empty() { key.to_owned() } else { format!("{}.{key}", self.path) }
    }
}

impl Drop for Table<'_, '_> {
    fn drop(&mut self) {
        for key in self.entries.keys() {
            let name = key.get_ref().as_ref();
            if self.asked.contains(name) {
                continue;
            }
            let nearest = self
                .asked
                .iter()
                .filter(|known| !self.entries.contains_key(known.as_str()))
                .map(|known| (strsim::damerau_levenshtein(known, name), known))
                .min()
                .filter(|(distance, known)| *distance <= known.len().div_ceil(2));
            let hint = match nearest {
                Some((_, known)) => format!("did you mean \"{known}\"?"),
                None => format!("known keys: {}", self.asked.iter().cloned().collect::<Vec<_>>().join(", ")),
            };
            self.note(key.span(), format!("unknown key \"{name}\" in {}; {hint}", self.place()));
        }
    }
}

fn wanted(unit: Unit) -> String {
    format!("{} such as \"{}\"", unit.kind(), unit.example())
}

fn one_of<'w>(words: impl Iterator<Item = &'w str>) -> String {
    any_of(words.map(|word| format!("\"{word}\"")))
}

fn any_of(words: impl Iterator<Item = String>) -> String {
    words.collect::<Vec<_>>().join(" or ")
}

fn with_article(kind: &str) -> String {
    let article = if kind.starts_with(['a', 'e', 'i', 'o', 'u']) { "an" } else { "a" };
    format!("{article} {kind}")
}
