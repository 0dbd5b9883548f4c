#![no_main]

fuzz::documents!(checks::judges::brief::judge);
