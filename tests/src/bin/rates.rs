//! Prints how often the checks light: `rates [RUNS [FILE]]`, 200 runs by default; FILE gets the table.

use courseband_tests::rates::{FAULTS, lit};

fn main() {
    let mut words = std::env::args().skip(1);
    let runs: u64 = words.next().and_then(|word| word.parse().ok()).unwrap_or(200);
    let mut lines =
        vec![format!("# Courseband {}, {runs} runs each; two groups of ten, eight visits", env!("CARGO_PKG_VERSION"))];
    lines.push("fault,right check,runs,right check lit,any check lit,upper limit of any (95 %)".to_string());
    for (fault, keys, name) in FAULTS {
        let (mut right, mut any) = (0, 0);
        for seed in 0..runs {
            let found = lit(fault, 10_000 + seed);
            any += u64::from(!found.is_empty());
            right += u64::from(found.iter().any(|key| keys.contains(&key.as_str())));
        }
        let share = any as f64 / runs as f64;
        let upper = share + 1.96 * (share * (1.0 - share) / runs as f64).sqrt();
        lines.push(format!("{name},{},{runs},{right},{any},{upper:.3}", keys.join(" or ")));
        println!("{}", lines[lines.len() - 1]);
    }
    if let Some(file) = words.next()
        && let Err(error) = std::fs::write(&file, lines.join("\n") + "\n")
    {
        eprintln!("{file}: {error}");
        std::process::exit(1);
    }
}
