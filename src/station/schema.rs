//! The JSON Schema of the station file, from the same lists of keys the reader uses.

use super::raw::RawStation;
use serde_json::Value;

/// Tables the file must have (the others' types are no options either, so that a faulty one does not hide the rest).
const NEEDED: [&str; 3] = ["earth", "feed", "operation"];

/// JSON Schema (draft 2020-12) of the station file, for editors that complete and check TOML.
#[must_use]
pub fn schema() -> Value {
    let mut schema = schemars::generate::SchemaSettings::draft2020_12()
        .into_generator()
        .into_root_schema_for::<RawStation>()
        .to_value();
    strip_null(&mut schema);
    if let Some(required) = schema.get_mut("required").and_then(Value::as_array_mut) {
        required.retain(|key| key.as_str().is_some_and(|k| NEEDED.contains(&k)));
    }
    schema
}

/// TOML has no null: an optional key is simply absent.
fn strip_null(value: &mut Value) {
    match value {
        Value::Object(map) => {
            if let Some(Value::Array(types)) = map.get_mut("type") {
                types.retain(|t| t != "null");
                if types.len() == 1 {
                    let only = types.remove(0);
                    map.insert("type".to_owned(), only);
                }
            }
            if let Some(Value::Array(any)) = map.get_mut("anyOf") {
                any.retain(|s| s.get("type").is_none_or(|t| t != "null"));
            }
            map.values_mut().for_each(strip_null);
        }
        Value::Array(items) => items.iter_mut().for_each(strip_null),
        _ => {}
    }
}
