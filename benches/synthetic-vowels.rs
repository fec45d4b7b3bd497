//! Writes the invented test surveys with their truth, one folder a condition:
//! `cargo bench --bench synthetic-vowels -- FOLDER [SPEAKERS TIMES SEED]`.

#[path = "../tests/recordings/mod.rs"]
mod recordings;

use std::path::PathBuf;

use recordings::folder::{self, Condition};

fn main() -> std::io::Result<()> {
    // cargo itself adds `--bench` to the arguments.
    let given: Vec<String> = std::env::args()
        .skip(1)
        .filter(|a| a != "--bench")
        .collect();
    let Some(place) = given.first().map(PathBuf::from) else {
        eprintln!("usage: cargo bench --bench synthetic-vowels -- FOLDER [SPEAKERS TIMES SEED]");
        return Ok(());
    };
    let number = |k: usize, usual: u64| given.get(k).and_then(|n| n.parse().ok()).unwrap_or(usual);
    let (speakers, times, seed) = (number(1, 24), number(2, 2), number(3, 1));
    for condition in Condition::ALL {
        let made = folder::survey(condition, speakers as usize, times as usize, seed);
        folder::write(&made, &place.join(condition.name()))?;
        println!("{}: {} recordings", condition.name(), made.len());
    }
    Ok(())
}
