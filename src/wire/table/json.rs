//! One line of JSON as keys and values.

use std::borrow::Cow;

use serde_json::{Map, Value};

use crate::wire::group::Group;

/// The object of a line.
pub(super) fn object(line: &[u8]) -> Result<Map<String, Value>, String> {
    match serde_json::from_slice(line) {
        Ok(Value::Object(object)) => Ok(object),
        Ok(_) => Err("not an object".to_owned()),
        Err(error) => Err(error.to_string()),
    }
}

/// The value as text; `None` for null, an error for what is neither text nor number.
pub(super) fn text(value: &Value) -> Result<Option<Cow<'_, str>>, ()> {
    match value {
        Value::Null => Ok(None),
        Value::String(text) => Ok(Some(Cow::Borrowed(text))),
        Value::Number(number) => Ok(Some(Cow::Owned(number.to_string()))),
        Value::Bool(_) | Value::Array(_) | Value::Object(_) => Err(()),
    }
}

/// Where a key stands in the line; the whole line where it is written with escapes.
pub(super) fn place<'a>(whole: Group<'a>, key: &str) -> Group<'a> {
    let key = key.as_bytes();
    // Short lines only, so that many keys in one endless line stay cheap.
    let line = whole.text.get(..4096).unwrap_or(whole.text);
    let found = line.windows(key.len() + 2).position(|window| {
        window.first() == Some(&b'"')
            && window.last() == Some(&b'"')
            && window.get(1..=key.len()) == Some(key)
    });
    let Some(at) = found else { return whole };
    // From the key to the comma or brace after its value.
    let rest = line.get(at..).unwrap_or_default();
    let mut quoted = false;
    let length = rest
        .iter()
        .position(|&byte| {
            if byte == b'"' {
                quoted = !quoted;
            }
            !quoted && matches!(byte, b',' | b'}')
        })
        .unwrap_or(rest.len());
    Group { text: rest.get(..length).unwrap_or_default(), start: whole.start + at }
}
