//! Invented plants in, score out: what the analysis and the rules conclude, held against what
//! was true. One table, which the read-me shows; a goal that is missed is told, a bound that is
//! broken fails.
//!
//! `cargo test --test scenarios -- --nocapture` prints it. A new scenario is its file and a
//! line in [`SCENARIOS`].

mod accuracy;
mod forecast;
mod limits;
mod quiet;
mod runner;
mod score;
mod trouble;
mod verdicts;
mod winter;

use std::sync::Mutex;

use score::Score;

type Scenario = fn() -> Vec<Score>;

/// In the order of the table.
const SCENARIOS: [Scenario; 7] = [
    accuracy::scores,
    limits::scores,
    quiet::scores,
    forecast::scores,
    verdicts::scores,
    winter::scores,
    trouble::scores,
];

#[test]
fn what_is_concluded_is_held_against_what_was_true() {
    let next = Mutex::new(0);
    let told: Mutex<Vec<(usize, Vec<Score>)>> = Mutex::new(Vec::new());
    std::thread::scope(|scope| {
        for _ in 0..std::thread::available_parallelism().map_or(2, usize::from) {
            scope.spawn(|| {
                loop {
                    let at = {
                        let mut next = next.lock().unwrap();
                        *next += 1;
                        *next - 1
                    };
                    let Some(scenario) = SCENARIOS.get(at) else { break };
                    let scores = scenario();
                    told.lock().unwrap().push((at, scores));
                }
            });
        }
    });
    let mut told = told.into_inner().unwrap();
    told.sort_by_key(|(at, _)| *at);
    let scores: Vec<Score> = told.into_iter().flat_map(|(_, s)| s).collect();
    println!("{}", score::table(&scores));
    let broken: Vec<String> = scores.iter().filter(|s| !s.holds()).map(Score::told).collect();
    assert!(broken.is_empty(), "bounds broken:\n{}", broken.join("\n"));
}
