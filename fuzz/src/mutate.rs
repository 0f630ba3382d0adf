//! A plain mutating driver for machines without a nightly compiler:
//! `cargo run --release --manifest-path fuzz/Cargo.toml --bin mutate -- TARGET SECONDS SEED FILE…`
//!
//! Takes the files as seeds, applies random edits (bits, numbers, splices, cuts, repeats) and runs
//! the target. A panic or an input that takes over ten seconds ends the run with the input written to
//! `crash-TARGET`.

use rand::{RngExt, SeedableRng};
use rand_xoshiro::Xoshiro256PlusPlus;
use std::time::{Duration, Instant};

const WORDS: [&[u8]; 14] = [
    b"999999999", b"-1", b"0", b"1e308", b"nan", b"NAXIS", b"NAXIS1  =", b"'", b"\"", b"[[", b"]",
    b"\xff\xfe", b"PCOUNT", b"TFORM1",
];

fn mutate(seeds: &[Vec<u8>], rng: &mut Xoshiro256PlusPlus) -> Vec<u8> {
    let mut data = seeds[rng.random_range(0..seeds.len())].clone();
    for _ in 0..rng.random_range(1..8) {
        if data.is_empty() {
            data.push(b'#');
        }
        let at = rng.random_range(0..data.len());
        match rng.random_range(0..7) {
            0 => data[at] ^= 1 << rng.random_range(0..8),
            1 => data[at] = rng.random_range(0..=255),
            2 => {
                let word = WORDS[rng.random_range(0..WORDS.len())];
                let end = (at + word.len()).min(data.len());
                data.splice(at..end, word.iter().copied());
            }
            3 => data.truncate(at),
            4 => {
                let end = (at + rng.random_range(1..200)).min(data.len());
                data.drain(at..end);
            }
            5 => {
                let end = (at + rng.random_range(1..200)).min(data.len());
                let piece = data[at..end].to_vec();
                data.splice(at..at, piece);
            }
            _ => {
                let other = &seeds[rng.random_range(0..seeds.len())];
                if !other.is_empty() {
                    let from = rng.random_range(0..other.len());
                    let to = (from + 300).min(other.len());
                    data.splice(at..at, other[from..to].iter().copied());
                }
            }
        }
    }
    data
}

fn main() {
    let arguments: Vec<String> = std::env::args().skip(1).collect();
    let [name, seconds, seed, files @ ..] = arguments.as_slice() else {
        eprintln!("usage: mutate TARGET SECONDS SEED FILE…");
        std::process::exit(2);
    };
    let Some((_, target)) = comagauge_fuzz::TARGETS.iter().find(|(n, _)| n == name) else {
        eprintln!("no target {name}");
        std::process::exit(2);
    };
    let seeds: Vec<Vec<u8>> = files.iter().filter_map(|f| std::fs::read(f).ok()).collect();
    assert!(!seeds.is_empty(), "no seed file can be read");
    let mut rng = Xoshiro256PlusPlus::seed_from_u64(seed.parse().unwrap_or(1));
    let end = Instant::now() + Duration::from_secs(seconds.parse().unwrap_or(60));
    let (mut runs, mut slowest) = (0_u64, Duration::ZERO);
    while Instant::now() < end {
        let data = mutate(&seeds, &mut rng);
        let start = Instant::now();
        let fine = std::panic::catch_unwind(|| target(&data)).is_ok();
        slowest = slowest.max(start.elapsed());
        if !fine || start.elapsed() > Duration::from_secs(10) {
            let _ = std::fs::write(format!("crash-{name}"), &data);
            eprintln!("{name}: failed after {runs} runs; input in crash-{name}");
            std::process::exit(1);
        }
        runs += 1;
    }
    println!("{name}: {runs} inputs, none panicked; slowest {slowest:.2?}");
}
