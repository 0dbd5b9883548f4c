#![no_main]

fuzz::documents!(checks::judges::telling::judge);
