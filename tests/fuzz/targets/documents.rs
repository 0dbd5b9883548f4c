//! Reading alone, of every kind of document: many times faster than what follows it.

#![no_main]

fuzz::documents!(checks::judges::documents);
