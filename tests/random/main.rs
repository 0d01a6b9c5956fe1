//! Thousands of random circuits, run by hand: `cargo test --release --test random -- --count 5000`.
//!
//! Options: `--seed N`, `--from N`, `--count N`, `--jobs N`, `--compare N` (how many are held against another method),
//! `--show N` (prints one netlist), `--only N` (runs one), `--seconds N` (a circuit that takes longer is listed as slow).

mod agreement;
#[path = "mod.rs"]
mod random;

use agreement::{Agreement, agreement};
use coilbreak::studies::workers;
use random::judge::{End, judge, netlist};
use std::collections::BTreeMap;
use std::panic::{AssertUnwindSafe, catch_unwind};
use std::time::Instant;

fn option(name: &str) -> Option<u64> {
    let mut arguments = std::env::args().skip_while(|argument| argument != name);
    arguments.next()?;
    arguments.next()?.parse().ok()
}

fn main() {
    let seed = option("--seed").unwrap_or(1);
    if let Some(number) = option("--show") {
        print!("{}", random::circuit::netlist(seed, number));
        return;
    }
    if let Some(number) = option("--only") {
        println!("{:?}", one(seed, number));
        return;
    }
    let from = option("--from").unwrap_or(0);
    let count = option("--count").unwrap_or(5000);
    let jobs = option("--jobs").unwrap_or(2);
    let seconds = option("--seconds").unwrap_or(5) as f64;
    std::panic::set_hook(Box::new(|_| {}));
    let ends = workers::in_order(
        count as usize,
        jobs as usize,
        |item, _| {
            let number = from + item as u64;
            let began = Instant::now();
            let end = catch_unwind(AssertUnwindSafe(|| one(seed, number)))
                .unwrap_or_else(|_| End::Defect("panic".into()));
            let took = began.elapsed().as_secs_f64();
            if took > seconds {
                println!("{number}: slow, {took:.1} s: {end:?}");
            }
            end
        },
        &mut |_, _| {},
    );
    tell(from, &ends);
    let compared = option("--compare").unwrap_or(0);
    let sound = (from..).zip(&ends);
    let numbers: Vec<u64> = sound
        .filter(|(_, end)| matches!(end, End::Result(_)))
        .map(|(number, _)| number)
        .collect();
    compare(seed, &numbers, compared as usize, jobs as usize);
}

/// Holds as many transients against another method.
fn compare(seed: u64, numbers: &[u64], count: usize, jobs: usize) {
    let found = workers::in_order(
        if count == 0 {
            0
        } else {
            numbers.len().min(2 * count)
        },
        jobs,
        |item, _| {
            let text = random::circuit::netlist(seed, numbers[item]);
            netlist(&text).ok().and_then(|netlist| agreement(&netlist))
        },
        &mut |_, _| {},
    );
    let (mut agreed, mut compared) = (0, 0);
    for (number, found) in numbers.iter().zip(found) {
        let Some(found) = found.filter(|_| compared < count) else {
            continue;
        };
        compared += 1;
        match found {
            Agreement::Within(_) => agreed += 1,
            Agreement::Off(by, what) => println!("{number}: off by {by:.1e} in {what}"),
            Agreement::Stopped(why) => println!("{number}: the other method: {why}"),
        }
    }
    if compared > 0 {
        println!("{agreed} of {compared} transients agree with the other method");
    }
}

fn one(seed: u64, number: u64) -> End {
    let text = random::circuit::netlist(seed, number);
    match netlist(&text) {
        Err(words) => End::Refused(words),
        Ok(netlist) => judge(&netlist).0,
    }
}

fn tell(from: u64, ends: &[End]) {
    let mut refused: BTreeMap<String, u64> = BTreeMap::new();
    let (mut sound, mut good) = (0, 0);
    for (item, end) in ends.iter().enumerate() {
        let number = from + item as u64;
        match end {
            End::Result(_) => (sound, good) = (sound + 1, good + 1),
            End::Refused(word) => {
                let word = word.split(' ').next().unwrap_or_default();
                *refused.entry(word.to_owned()).or_default() += 1;
            }
            End::Stopped(headline) => {
                sound += 1;
                println!("{number}: {headline}");
            }
            End::Defect(what) => {
                sound += 1;
                println!("{number}: DEFECT {what}");
            }
        }
    }
    println!("refused: {refused:?}");
    let share = 100.0 * f64::from(good) / f64::from(sound.max(1));
    println!("{good} of {sound} sound circuits give a result whose ledger closes: {share:.2} %");
}
