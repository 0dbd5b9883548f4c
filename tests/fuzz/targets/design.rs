#![no_main]

fuzz::documents!(|bytes: &[u8]| checks::judges::design::judge(bytes, 3));
