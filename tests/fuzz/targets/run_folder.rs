#![no_main]

fuzz::inputs!(|bytes: &[u8]| fuzz::in_memory(|place| {
    checks::judges::run_folder::judge(bytes, place)
}));
