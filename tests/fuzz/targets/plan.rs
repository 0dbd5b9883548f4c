#![no_main]

fuzz::documents!(checks::judges::plan::judge);
