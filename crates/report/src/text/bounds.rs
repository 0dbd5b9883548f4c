//! Which variables ended on a bound.

/// How many are named.
const MOST_NAMED: usize = 4;

/// The beginning of a sentence that names the addresses of the variables that ended on a bound;
/// `None` if there are none.
#[must_use]
pub fn ended_on_bounds(on_bounds: &[String], variables: usize) -> Option<String> {
    let count = on_bounds.len();
    let named = on_bounds.get(..count.min(MOST_NAMED)).filter(|named| !named.is_empty())?;
    let rest = match count - named.len() {
        0 => String::new(),
        rest => format!(" and {rest} more"),
    };
    Some(format!("{count} of {variables} variables ended on a bound ({}{rest})", named.join(", ")))
}
