#![no_main]

libfuzzer_sys::fuzz_target!(|data: &[u8]| comagauge_fuzz::ephemeris(data));
