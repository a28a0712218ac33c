//! Subscription filters: their form, what they match, and whether two can match the same topic.

use super::TopicFault;

/// Checks a subscription filter: `+` and `#` alone in their level, `#` only last, no control characters.
///
/// # Errors
/// [`TopicFault`] with the place.
pub fn check_filter(filter: &str) -> Result<(), TopicFault> {
    if filter.is_empty() {
        return Err(TopicFault::Empty);
    }
    if filter.len() > usize::from(u16::MAX) {
        return Err(TopicFault::TooLong {
            length: filter.len(),
            allowed: usize::from(u16::MAX),
        });
    }
    characters(filter, |_| false)?;
    let mut position = 0;
    let count = filter.split('/').count();
    for (index, level) in filter.split('/').enumerate() {
        for (at, character) in level.char_indices() {
            let misplaced = match character {
                '+' => level.len() > 1,
                '#' => level.len() > 1 || index + 1 < count,
                _ => false,
            };
            if misplaced {
                return Err(TopicFault::Character {
                    character,
                    position: position + at,
                });
            }
        }
        position += level.len() + 1;
    }
    Ok(())
}

/// Whether a topic is matched by a filter, as a broker would.
#[must_use]
pub fn matches(filter: &str, topic: &str) -> bool {
    if topic.starts_with('$') && filter.starts_with(['+', '#']) {
        return false;
    }
    overlap(filter, topic)
}

/// Whether some topic is matched by both filters; only `a` may end in `#`.
pub(super) fn overlap(a: &str, b: &str) -> bool {
    let (mut a, mut b) = (a.split('/'), b.split('/'));
    loop {
        match (a.next(), b.next()) {
            (Some("#"), _) | (None, None) => return true,
            (Some(x), Some(y)) if x == y || x == "+" || y == "+" => {}
            (Some(_), Some(_)) | (Some(_), None) | (None, Some(_)) => return false,
        }
    }
}

pub(super) fn characters(text: &str, refused: impl Fn(char) -> bool) -> Result<(), TopicFault> {
    match text
        .char_indices()
        .find(|(_, c)| c.is_control() || refused(*c))
    {
        Some((position, character)) => Err(TopicFault::Character {
            character,
            position,
        }),
        None => Ok(()),
    }
}
