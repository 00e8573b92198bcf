//! The reference values in `data/published_checks.json`.

use std::sync::LazyLock;

use serde_json::{Map, Value};

/// One reference value with where it comes from.
#[derive(Clone, Debug, PartialEq)]
pub struct Record {
    /// Name, parts separated by dots.
    pub id: String,
    /// What the value is, in words.
    pub quantity: String,
    /// How it follows.
    pub formula: String,
    /// The numbers it follows from.
    pub inputs: Map<String, Value>,
    /// The value, in [`unit`](Self::unit).
    pub value: f64,
    /// Unit, or a word such as `length^n` where lengths are in units of the body.
    pub unit: String,
    /// Absolute uncertainty of the value itself.
    pub tolerance: f64,
    /// Publication, and whether it was opened.
    pub source: String,
    /// `computed`, `seen` or `memory`.
    pub provenance: String,
    /// The independent check of the value.
    pub verified_by: String,
}

static RECORDS: LazyLock<Vec<Record>> =
    LazyLock::new(|| parse(include_str!("../data/published_checks.json")));

impl Record {
    /// Gives an input that is one number.
    ///
    /// # Panics
    ///
    /// If the record has no such number.
    #[track_caller]
    pub fn number(&self, key: &str) -> f64 {
        let value = self.inputs.get(key).and_then(Value::as_f64);
        value.unwrap_or_else(|| panic!("{}: no number {key:?} among {:?}", self.id, self.inputs))
    }

    /// Gives an input that is a whole number.
    ///
    /// # Panics
    ///
    /// If the record has no such number.
    #[track_caller]
    pub fn count(&self, key: &str) -> u32 {
        let value = self
            .inputs
            .get(key)
            .and_then(Value::as_u64)
            .and_then(|n| u32::try_from(n).ok());
        value.unwrap_or_else(|| {
            panic!(
                "{}: no whole number {key:?} among {:?}",
                self.id, self.inputs
            )
        })
    }

    /// Gives an input that is a list of numbers.
    ///
    /// # Panics
    ///
    /// If the record has no such list.
    #[track_caller]
    pub fn numbers(&self, key: &str) -> Vec<f64> {
        let list = self.inputs.get(key).and_then(Value::as_array);
        let numbers =
            list.and_then(|list| list.iter().map(Value::as_f64).collect::<Option<Vec<f64>>>());
        numbers.unwrap_or_else(|| {
            panic!(
                "{}: no list of numbers {key:?} among {:?}",
                self.id, self.inputs
            )
        })
    }

    /// Gives an input that is text.
    ///
    /// # Panics
    ///
    /// If the record has no such text.
    #[track_caller]
    pub fn text(&self, key: &str) -> &str {
        let value = self.inputs.get(key).and_then(Value::as_str);
        value.unwrap_or_else(|| panic!("{}: no text {key:?} among {:?}", self.id, self.inputs))
    }
}

/// Gives the records whose id is `prefix` or starts with it followed by a dot.
///
/// # Panics
///
/// If there is none: a renamed record must not turn a test into one that compares nothing.
#[track_caller]
pub fn records(prefix: &str) -> Vec<&'static Record> {
    let found: Vec<_> = RECORDS
        .iter()
        .filter(|record| within(&record.id, prefix))
        .collect();
    assert!(
        !found.is_empty(),
        "no reference value is called {prefix:?} or {prefix:?}.*"
    );
    found
}

/// Gives the record of exactly this id.
///
/// # Panics
///
/// If there is none.
#[track_caller]
pub fn record(id: &str) -> &'static Record {
    let found = RECORDS.iter().find(|record| record.id == id);
    found.unwrap_or_else(|| panic!("no reference value is called {id:?}"))
}

/// Tells whether `id` equals `prefix` or lies below it.
pub(crate) fn within(id: &str, prefix: &str) -> bool {
    id.strip_prefix(prefix)
        .is_some_and(|rest| rest.is_empty() || rest.starts_with('.'))
}

fn parse(text: &str) -> Vec<Record> {
    let list: Vec<Map<String, Value>> =
        serde_json::from_str(text).expect("the file is a list of objects");
    list.into_iter().map(read).collect()
}

fn read(mut object: Map<String, Value>) -> Record {
    let text = |key: &str| {
        object[key]
            .as_str()
            .unwrap_or_else(|| panic!("{key} is no text: {object:?}"))
            .to_owned()
    };
    let number = |key: &str| {
        object[key]
            .as_f64()
            .unwrap_or_else(|| panic!("{key} is no number: {object:?}"))
    };
    let mut record = Record {
        id: text("id"),
        quantity: text("quantity"),
        formula: text("formula"),
        inputs: Map::new(),
        value: number("value"),
        unit: text("unit"),
        tolerance: number("tolerance"),
        source: text("source"),
        provenance: text("provenance"),
        verified_by: text("verified_by"),
    };
    if let Some(Value::Object(inputs)) = object.remove("inputs") {
        record.inputs = inputs;
    }
    record
}

#[cfg(test)]
mod tests {
    use std::collections::BTreeSet;

    use super::*;

    #[test]
    fn every_record_states_where_it_comes_from_and_how_it_was_checked() {
        let mut ids = BTreeSet::new();
        for record in RECORDS.iter() {
            assert!(ids.insert(&record.id), "{} is there twice", record.id);
            assert!(
                record.value.is_finite() && record.tolerance >= 0.0,
                "{}",
                record.id
            );
            let known = ["computed", "seen", "memory"].contains(&record.provenance.as_str());
            assert!(known, "{}: provenance {:?}", record.id, record.provenance);
            assert!(
                !record.source.is_empty() && !record.verified_by.is_empty(),
                "{}",
                record.id
            );
            assert!(
                !record.quantity.is_empty() && !record.formula.is_empty(),
                "{}",
                record.id
            );
        }
        assert_eq!(ids.len(), 224);
    }

    #[test]
    fn a_prefix_ends_at_a_dot() {
        assert_eq!(records("chord.box.1.1.1").len(), 5);
        assert_eq!(records("chord.box").len(), 50);
        assert_eq!(records("vf.parallel_rect").len(), 6);
        assert!(!within("chord.box.1.1.10.mean", "chord.box.1.1.1"));
    }

    #[test]
    #[should_panic(expected = "no reference value")]
    fn a_prefix_that_finds_nothing_is_an_error() {
        records("vf.parallel_rec");
    }

    #[test]
    fn inputs_are_read_by_kind() {
        let record = record("box.cube_mixed_face.x+");
        assert_eq!(record.numbers("rho_faces"), [0.9, 0.7, 0.5, 0.3, 0.8, 0.6]);
        assert_eq!(record.text("face"), "x+");
        assert_eq!(super::record("vf.perp_rect.w0.5.h1.5.l2").number("h"), 1.5);
    }

    #[test]
    #[should_panic(expected = "no number \"width\"")]
    fn a_missing_input_is_an_error() {
        record("vf.perp_rect.w0.5.h1.5.l2").number("width");
    }
}
