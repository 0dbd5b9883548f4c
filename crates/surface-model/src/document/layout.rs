//! Documents as text for people to read and edit.

use serde_json::{Map, Value};

/// Columns within which an object or list stays on one line.
const WIDTH: usize = 100;

/// The text of a document: an object or list stands on one line if it fits within 100 columns, with
/// the comma that may follow it, otherwise with one entry a line, indented by two spaces; a longer list of plain numbers fills
/// its lines. Numbers are the shortest that read back to the same bits. Ends with a line break.
///
/// Reading the text gives the same value, bit for bit, as long as it is nested less than 128 deep.
/// There is no text for NaN and infinity because a [`Value`] cannot hold them.
pub fn layout(value: &Value) -> String {
    let mut page = Page { text: String::new() };
    page.put(value, 0, 0);
    page.text.push('\n');
    page.text
}

/// The text so far.
struct Page {
    text: String,
}

impl Page {
    /// Puts a value at the end; `used` columns of its line are taken, and it lies in `depth`
    /// objects and lists.
    fn put(&mut self, value: &Value, depth: usize, used: usize) {
        // One column is kept for the comma that may follow.
        if let Some(line) = on_one_line(value, (WIDTH - 1).saturating_sub(used)) {
            self.text.push_str(&line);
            return;
        }
        match value {
            Value::Array(list) if list.iter().all(Value::is_number) => self.fill(list, depth + 1),
            Value::Array(list) => self.put_list(list, depth + 1),
            Value::Object(map) => self.put_object(map, depth + 1),
            leaf => self.text.push_str(&leaf.to_string()),
        }
    }

    fn new_line(&mut self, depth: usize) {
        self.text.push('\n');
        self.text.extend(std::iter::repeat_n("  ", depth));
    }

    fn put_list(&mut self, list: &[Value], depth: usize) {
        self.text.push('[');
        for (index, entry) in list.iter().enumerate() {
            self.separate(index, depth);
            self.put(entry, depth, 2 * depth);
        }
        self.new_line(depth - 1);
        self.text.push(']');
    }

    fn put_object(&mut self, map: &Map<String, Value>, depth: usize) {
        self.text.push('{');
        for (index, (key, entry)) in map.iter().enumerate() {
            self.separate(index, depth);
            let key = key_text(key);
            self.text.push_str(&key);
            self.put(entry, depth, 2 * depth + key.chars().count());
        }
        self.new_line(depth - 1);
        self.text.push('}');
    }

    /// A list of numbers, as many a line as fit.
    fn fill(&mut self, list: &[Value], depth: usize) {
        self.text.push('[');
        let mut column = WIDTH;
        for (index, number) in list.iter().enumerate() {
            let number = number.to_string();
            if column + number.len() + 2 > WIDTH {
                self.separate(index, depth);
                column = 2 * depth;
            } else {
                self.text.push_str(", ");
                column += 1;
            }
            column += number.len() + 1;
            self.text.push_str(&number);
        }
        self.new_line(depth - 1);
        self.text.push(']');
    }

    fn separate(&mut self, index: usize, depth: usize) {
        if index > 0 {
            self.text.push(',');
        }
        self.new_line(depth);
    }
}

/// A key, in quotes, and what stands between it and its value.
fn key_text(key: &str) -> String {
    format!("{}: ", Value::from(key))
}

/// The value on one line of at most `columns` characters.
fn on_one_line(value: &Value, columns: usize) -> Option<String> {
    let mut line = Line { text: String::new(), left: columns };
    line.put(value)?;
    Some(line.text)
}

/// A line that takes no more than there is room for.
struct Line {
    text: String,
    left: usize,
}

impl Line {
    fn push(&mut self, part: &str) -> Option<()> {
        self.left = self.left.checked_sub(part.chars().count())?;
        self.text.push_str(part);
        Some(())
    }

    fn put(&mut self, value: &Value) -> Option<()> {
        match value {
            Value::Array(list) => {
                self.push("[")?;
                for (index, entry) in list.iter().enumerate() {
                    self.push(if index == 0 { "" } else { ", " })?;
                    self.put(entry)?;
                }
                self.push("]")
            }
            Value::Object(map) if map.is_empty() => self.push("{}"),
            Value::Object(map) => {
                for (index, (key, entry)) in map.iter().enumerate() {
                    self.push(if index == 0 { "{ " } else { ", " })?;
                    self.push(&key_text(key))?;
                    self.put(entry)?;
                }
                self.push(" }")
            }
            leaf => self.push(&leaf.to_string()),
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::document::parse::parse;
    use crate::document::tests::{SAMPLE, any_value, same_bits};
    use proptest::prelude::*;
    use serde_json::json;

    #[test]
    fn a_design_reads_well() {
        let value = parse(SAMPLE).unwrap();
        insta::assert_snapshot!(layout(&value), @r#"
        {
          "format": "drawtube/1",
          "title": "River-survey lidar transmitter, 2x to 6x",
          "beam": { "wavelengths_nm": [532.0], "diameter_mm": 2.4, "traced_to": 1.5 },
          "glasses": {
            "melt-4471": { "from": "N-BK7", "index_shift": 0.00021 },
            "bench-medium": { "index": 1.62 }
          },
          "groups": [
            {
              "name": "entry",
              "elements": [
                {
                  "radii_mm": [74.76, -20.16],
                  "glasses": ["fused-silica"],
                  "thicknesses_mm": [3.0],
                  "diameter_mm": 8.0
                }
              ]
            },
            {
              "name": "runner",
              "elements": [
                {
                  "radii_mm": [-23.63, 8.94],
                  "glasses": ["fused-silica"],
                  "thicknesses_mm": [2.0],
                  "diameter_mm": 8.0
                }
              ]
            },
            {
              "name": "exit",
              "elements": [
                {
                  "name": "pair",
                  "radii_mm": [426.0, -60.0, -85.6],
                  "glasses": ["N-BK7", "N-SF6"],
                  "thicknesses_mm": [5.0, 2.0],
                  "diameter_mm": 26.0
                },
                {
                  "radii_mm": ["flat", -300.0],
                  "glasses": ["fused-silica"],
                  "thicknesses_mm": [4.0],
                  "diameter_mm": 26.0,
                  "shapes": [null, { "conic": -1.2, "asphere": { "4": 1.1e-7 } }]
                }
              ],
              "airs_mm": [1.0]
            }
          ],
          "housing": { "track_mm": 150.0, "fixed": ["exit"] },
          "states": [
            { "name": "2x", "ratio": 2.0, "spacings_mm": [13.39, 107.22] },
            { "name": "6x", "ratio": 6.0, "spacings_mm": [1.0, 127.88], "weight": 1.0 }
          ],
          "free": [
            "radii",
            "spacings",
            { "at": "/groups/exit/elements/pair/thicknesses_mm/0", "min": 3.0, "max": 8.0 }
          ],
          "held": ["/groups/entry/elements/0/radii_mm/1"]
        }
        "#);
    }

    #[test]
    fn long_lists_of_numbers_fill_their_lines() {
        let numbers: Vec<f64> = (0..40).map(|n| f64::from(n) * 1.25).collect();
        insta::assert_snapshot!(layout(&json!({ "radii_mm": numbers, "e": [], "o": {} })), @r#"
        {
          "radii_mm": [
            0.0, 1.25, 2.5, 3.75, 5.0, 6.25, 7.5, 8.75, 10.0, 11.25, 12.5, 13.75, 15.0, 16.25, 17.5, 18.75,
            20.0, 21.25, 22.5, 23.75, 25.0, 26.25, 27.5, 28.75, 30.0, 31.25, 32.5, 33.75, 35.0, 36.25, 37.5,
            38.75, 40.0, 41.25, 42.5, 43.75, 45.0, 46.25, 47.5, 48.75
          ],
          "e": [],
          "o": {}
        }
        "#);
    }

    #[test]
    fn a_line_is_broken_at_its_last_column() {
        for length in 1..120 {
            let list = json!(["x".repeat(length), "y"]);
            let text = layout(&json!({ "k": [list, list, "long".repeat(30)] }));
            let joined = text.lines().find(|line| line.contains("\", \""));
            // Four columns of indent, `["`, `", "y"]` and a comma.
            let width = 4 + 2 + length + 7 + 1;
            assert_eq!(joined.is_some(), width <= WIDTH, "{text}");
            assert!(joined.is_none_or(|line| line.len() == width), "{text}");
        }
    }

    #[test]
    fn a_large_document_takes_no_time() {
        let states = vec![json!({ "spacings_mm": [1.5, 2.5], "name": "a" }); 100_000];
        let start = std::time::Instant::now();
        assert!(layout(&json!({ "states": states })).len() > 4_000_000);
        assert!(start.elapsed().as_secs() < 5);
    }

    proptest! {
        #[test]
        fn reads_back_bit_for_bit(value in any_value()) {
            let text = layout(&value);
            prop_assert!(text.ends_with('\n'));
            prop_assert!(same_bits(&parse(&text).unwrap(), &value), "{}", text);
        }

        #[test]
        fn keeps_within_its_columns(value in any_value()) {
            for line in layout(&value).lines() {
                let breakable = line.contains(", ") && !line.contains('"');
                prop_assert!(line.chars().count() <= WIDTH || !breakable, "{}", line);
            }
        }
    }
}
