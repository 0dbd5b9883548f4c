//! What only a brief can have wrong.

use surface_model::document::{Address, Complain, Place};

use super::document::BriefDocument;

/// A fault of a brief that neither its structure shows nor a design file could have.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
#[non_exhaustive]
pub(super) enum BriefError {
    /// More cemented pairs than elements.
    #[error("{pairs} of {elements} elements are to be cemented pairs")]
    Pairs {
        /// The group's pairs.
        pairs: usize,
        /// The group's elements.
        elements: usize,
    },
    /// A glass that is allowed twice.
    #[error("the glass \"{0}\" is allowed twice")]
    GlassTwice(String),
}

/// A fault and its place.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
#[error("{error}")]
pub(super) struct BriefFault {
    at: Address,
    error: BriefError,
}

impl Complain for BriefFault {
    fn place(&self) -> Place {
        Place::Value(self.at.clone())
    }

    fn expected(&self) -> Option<String> {
        Some(match &self.error {
            BriefError::Pairs { elements, .. } => format!("at most {elements}"),
            BriefError::GlassTwice(_) => "each glass once".into(),
        })
    }
}

/// Everything of the kind in a brief.
pub(super) fn faults(brief: &BriefDocument) -> Vec<BriefFault> {
    let mut faults = Vec::new();
    for (g, group) in brief.groups.iter().flatten().enumerate() {
        if let (Some(elements), Some(pairs)) = (group.elements, group.pairs)
            && pairs > elements
        {
            let at = Address::root().key("groups").index(g).key("pairs");
            faults.push(BriefFault { at, error: BriefError::Pairs { pairs, elements } });
        }
    }
    for (i, name) in brief.glasses_allowed.iter().enumerate() {
        if brief.glasses_allowed[..i].contains(name) {
            let at = Address::root().key("glasses_allowed").index(i);
            faults.push(BriefFault { at, error: BriefError::GlassTwice(name.clone()) });
        }
    }
    faults
}
