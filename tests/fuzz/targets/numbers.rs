#![no_main]

fuzz::inputs!(checks::judges::numbers::judge);
