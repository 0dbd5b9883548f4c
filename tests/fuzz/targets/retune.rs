#![no_main]

fuzz::inputs!(checks::judges::retune::judge);
