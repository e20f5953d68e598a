//! The schemas of what `--json` prints, as published in `harness/schema`: JSON Schema, draft 2020-12.
//!
//! One file for each command; what several share stands in `common.json`. [`bundled`] puts both together.

use serde_json::{Map, Value};

/// What several commands share.
const COMMON: &str = include_str!("../schema/common.json");

/// The schema files, by command.
macro_rules! files {
    ($($name:literal),+ $(,)?) => {
        const FILES: &[(&str, &str)] = &[$(($name, include_str!(concat!("../schema/", $name, ".json")))),+];
    };
}

files!(
    "study",
    "characterise",
    "choose",
    "prove",
    "limit",
    "compare",
    "replay",
    "generate",
    "network",
    "emit",
    "recheck",
    "schema",
    "completions",
    "manual",
    // What is printed when nothing could be understood of what was typed.
    "usage",
);

/// How a file refers to what several share.
const SHARED: &str = "common.json#/$defs/";

/// The commands that have a schema.
pub fn names() -> impl Iterator<Item = &'static str> {
    FILES.iter().map(|&(name, _)| name)
}

/// The schema of what `command` prints with `--json`, complete in itself.
///
/// # Panics
/// Never: the tests bundle every file.
#[must_use]
pub fn bundled(command: &str) -> Option<Value> {
    let (_, text) = FILES.iter().find(|(name, _)| *name == command)?;
    let parse = |text: &str| serde_json::from_str::<Value>(text).expect("the schemas are tested");
    let (mut schema, common) = (parse(text), parse(COMMON));
    let mut definitions = Map::new();
    let mut wanted = Vec::new();
    inline(&mut schema, &mut wanted);
    while let Some(name) = wanted.pop() {
        if !definitions.contains_key(&name) {
            let mut definition = common["$defs"][&name].clone();
            assert!(!definition.is_null(), "common.json defines no {name}");
            inline(&mut definition, &mut wanted);
            definitions.insert(name, definition);
        }
    }
    schema["$defs"] = Value::Object(definitions);
    Some(schema)
}

/// Makes references to what is shared local, and notes what they refer to.
fn inline(schema: &mut Value, wanted: &mut Vec<String>) {
    match schema {
        Value::Array(items) => items.iter_mut().for_each(|item| inline(item, wanted)),
        Value::Object(members) => {
            for (key, value) in members {
                match value {
                    Value::String(text) if key == "$ref" => {
                        if let Some(name) = text.strip_prefix(SHARED) {
                            wanted.push(name.to_owned());
                            *text = format!("#/$defs/{name}");
                        }
                    }
                    other => inline(other, wanted),
                }
            }
        }
        _ => {}
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn schema_of_every_command_is_complete_in_itself() {
        for name in names() {
            let schema = bundled(name).expect("a schema");
            assert_eq!(schema["$schema"], "https://json-schema.org/draft/2020-12/schema", "{name}");
            assert!(!schema.to_string().contains("common.json"), "{name}");
            assert_eq!(schema["properties"]["schema"]["const"], crate::cli::SCHEMA, "{name}");
        }
        assert_eq!(bundled("no-such-command"), None);
    }
}
