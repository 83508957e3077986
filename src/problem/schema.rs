//! The key table as a JSON Schema (draft 2020-12), for editors.
//!
//! Owns: the shape of the schema. Checked in as `templates/problem-schema.json`; a test keeps it fresh.

use serde_json::{Map, Value, json};

use super::keys::{Key, PROBLEM, Shape, Table};

/// The schema of a problem file, pretty-printed, with a line break at its end.
pub fn schema() -> String {
    let mut schema = object(&PROBLEM);
    if let Value::Object(map) = &mut schema {
        map.insert(
            "$schema".to_owned(),
            json!("https://json-schema.org/draft/2020-12/schema"),
        );
        map.insert(
            "title".to_owned(),
            json!("Countermarch problem file, format 1"),
        );
    }
    serde_json::to_string_pretty(&schema).unwrap_or_default() + "\n"
}

fn object(table: &Table) -> Value {
    let properties: Map<String, Value> = table
        .keys
        .iter()
        .map(|key| (key.name.to_owned(), property(key)))
        .collect();
    let required: Vec<&str> = table
        .keys
        .iter()
        .filter(|key| key.required)
        .map(|key| key.name)
        .collect();
    let mut map = Map::new();
    map.insert("type".to_owned(), json!("object"));
    map.insert("description".to_owned(), json!(table.doc));
    map.insert("additionalProperties".to_owned(), json!(false));
    map.insert("properties".to_owned(), Value::Object(properties));
    if !required.is_empty() {
        map.insert("required".to_owned(), json!(required));
    }
    Value::Object(map)
}

fn property(key: &Key) -> Value {
    let mut value = shape(key.shape);
    if let Value::Object(map) = &mut value {
        map.insert("description".to_owned(), json!(key.doc));
    }
    value
}

fn shape(of: Shape) -> Value {
    let quantity = json!({ "type": ["number", "string"] });
    match of {
        Shape::Text | Shape::Id | Shape::Formula | Shape::Unit | Shape::Path => {
            json!({ "type": "string", "minLength": 1 })
        }
        Shape::Word(words) => json!({ "enum": words }),
        Shape::Symbol => json!({ "type": "string", "pattern": "^[A-Za-z][A-Za-z0-9_]{0,39}$" }),
        Shape::Integer(low, high) => json!({ "type": "integer", "minimum": low, "maximum": high }),
        Shape::Number(low, high) => json!({ "type": "number", "minimum": low, "maximum": high }),
        Shape::Truth => json!({ "type": "boolean" }),
        // A TOML date; editors hand it over as a string.
        Shape::Date => json!({ "type": "string", "format": "date" }),
        Shape::Quantity | Shape::Expression => quantity,
        Shape::Digest => json!({ "type": "string", "pattern": "^sha256:[0-9a-f]{64}$" }),
        Shape::Bounds => {
            json!({ "type": "array", "items": quantity, "minItems": 2, "maxItems": 2 })
        }
        Shape::Texts => json!({ "type": "array", "items": { "type": "string", "minLength": 1 } }),
        Shape::Points => {
            json!({ "type": "array", "items": { "type": "array", "items": { "type": "number" }, "minItems": 2, "maxItems": 2 } })
        }
        Shape::Assignments => json!({ "type": "object", "additionalProperties": quantity }),
        Shape::Names => json!({ "type": "object", "additionalProperties": { "type": "string" } }),
        Shape::Section(table) => object(table),
        Shape::Sections(table) => json!({ "type": "array", "items": object(table) }),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn regress_the_schema_checked_in_is_fresh() {
        let checked_in = include_str!("../../templates/problem-schema.json");
        assert!(
            checked_in == schema(),
            "run `countermarch keys --schema > templates/problem-schema.json`"
        );
    }
}
