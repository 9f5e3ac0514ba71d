//! `--set outside.air="-30 degC"`: one value of the case changed from the command line.
//!
//! A path goes through tables by key and through lists by number or by the `name` of an item:
//! `heater.trace.output`, `limit.0.below`, `layer."outer lagging".thickness`. What does not exist yet is added.

use super::walk::{Entry, Node, Value, parse_value};
use crate::faults::{Fault, Faults, Span, nearest, quoted};

/// Name under which messages show an override.
const SOURCE: &str = "--set";

/// Changes the tree by one override.
pub(super) fn apply(root: &mut Node, text: &str, faults: &mut Faults) {
    let source = faults.add_source(SOURCE, text);
    let at = |range| Span::new(source, range);
    let Some((path, offset)) = split_path(text) else {
        faults.push(
            Fault::error(at(0..text.len()), "an override is a path, an equals sign and a value")
                .label("no `=`")
                .help("as in --set outside.air=\"-30 degC\""),
        );
        return;
    };
    let value = parse_value(source, offset, &text[offset..]);
    if let Err(fault) = set(root, &path, value, source) {
        faults.push(*fault);
    }
}

struct Step {
    name: String,
    start: usize,
    end: usize,
}

/// The steps of the path and where the value begins.
fn split_path(text: &str) -> Option<(Vec<Step>, usize)> {
    let mut steps = Vec::new();
    let (mut start, mut quote) = (0, None);
    for (at, letter) in text.char_indices() {
        match (letter, quote) {
            (mark, Some(open)) if mark == open => quote = None,
            ('"' | '\'', None) => quote = Some(letter),
            ('.' | '=', None) => {
                let name = text[start..at].trim().trim_matches(['"', '\'']).to_owned();
                steps.push(Step { name, start, end: at });
                start = at + 1;
                if letter == '=' {
                    return Some((steps, start));
                }
            }
            _ => {}
        }
    }
    None
}

fn set(node: &mut Node, path: &[Step], value: Node, source: usize) -> Result<(), Box<Fault>> {
    let [step, rest @ ..] = path else {
        *node = value;
        return Ok(());
    };
    let span = Span::new(source, step.start..step.end);
    if step.name.is_empty() {
        return Err(Box::new(Fault::error(span, "a step of the path is empty").label("nothing between the points")));
    }
    match &mut node.value {
        Value::Table(entries) => {
            let found = entries.iter().position(|entry| entry.key == step.name).unwrap_or_else(|| {
                let node = Node { span, value: Value::Table(Vec::new()) };
                entries.push(Entry { key: step.name.clone(), key_span: span, node });
                entries.len() - 1
            });
            if rest.is_empty() {
                // The key has now been said here, not in the file.
                entries[found].key_span = span;
            }
            set(&mut entries[found].node, rest, value, source)
        }
        Value::Array(items) => {
            let names: Vec<_> = items.iter().map(|item| name_of(item).unwrap_or("").to_owned()).collect();
            let by_name = names.iter().position(|name| *name == step.name);
            let by_number = step.name.parse::<usize>().ok().filter(|&number| number < items.len());
            match by_name.or(by_number) {
                Some(found) => set(&mut items[found], rest, value, source),
                None => Err(Box::new(unknown_item(&step.name, span, &names))),
            }
        }
        // A plain value is replaced by what the path needs, such as the table of a value with a tolerance.
        _ if rest.is_empty() && step.name == "tolerance" => {
            let stated = Node { span: node.span, value: node.value.clone() };
            let entry = |key: &str, key_span, node| Entry { key: key.into(), key_span, node };
            node.value = Value::Table(vec![entry("value", node.span, stated), entry("tolerance", span, value)]);
            Ok(())
        }
        _ => Err(Box::new(
            Fault::error(
                span,
                format!("the path leads no further: before {} stands {}", quoted(&step.name), node.what()),
            )
            .label("no key of a table")
            .help("take this step out of the path"),
        )),
    }
}

fn name_of(item: &Node) -> Option<&str> {
    let Value::Table(entries) = &item.value else { return None };
    entries.iter().find(|entry| entry.key == "name").and_then(|entry| match &entry.node.value {
        Value::Text(text) => Some(text.as_str()),
        _ => None,
    })
}

fn unknown_item(name: &str, span: Span, names: &[String]) -> Fault {
    let named: Vec<_> = names.iter().filter(|name| !name.is_empty()).map(String::as_str).collect();
    let numbers = match names.len() {
        0 => "the list is empty".to_owned(),
        1 => "its one item is number 0".to_owned(),
        count => format!("its items are numbered from 0 to {}", count - 1),
    };
    let note = if named.is_empty() { numbers } else { format!("its items: {}; {numbers}", named.join(", ")) };
    Fault::error(span, format!("the list has no item {}", quoted(name)))
        .label("no such item")
        .note(note)
        .help_if(nearest(name, named.iter().copied()).map(|near| format!("did you mean `{near}`?")))
}
