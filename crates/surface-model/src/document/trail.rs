//! Where in a document the walk along its schema is.

use super::address::Address;

/// Where the walk is: made into an address only when something is wrong there.
#[derive(Clone, Copy)]
pub(super) enum Trail<'a> {
    Root,
    Key(&'a Trail<'a>, &'a str),
    Index(&'a Trail<'a>, usize),
}

impl Trail<'_> {
    pub(super) fn address(&self) -> Address {
        match self {
            Self::Root => Address::root(),
            Self::Key(before, key) => before.address().key(*key),
            Self::Index(before, index) => before.address().index(*index),
        }
    }

    /// The key that the value, or the list around it, stands under.
    pub(super) fn last_key(&self) -> Option<&str> {
        match self {
            Self::Root => None,
            Self::Key(_, key) => Some(key),
            Self::Index(list, _) => list.last_key(),
        }
    }

    pub(super) fn is_root(&self) -> bool {
        matches!(self, Self::Root)
    }
}
