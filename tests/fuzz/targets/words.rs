#![no_main]

fuzz::inputs!(|bytes: &[u8]| checks::judges::words::judge(&String::from_utf8_lossy(bytes)));
