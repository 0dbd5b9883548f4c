//! Nothing but tests lives here: `published/` holds the checks against outside sources, `program/` the whole-program runs.
