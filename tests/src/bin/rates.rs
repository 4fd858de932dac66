//! Prints how often the checks light: `rates [RUNS [FILE]]`, 200 runs by default; FILE gets the table.

use courseband_tests::rates::{FAULTS, lit};

fn main() {
    let mut words = std::env::args().skip(1);
    let runs: u64 = words.next().and_then(|word| word.parse().ok()).unwrap_or(200);
    let version = env!("CARGO_PKG_VERSION");
    let mut lines =
        vec![format!("# Courseband {version}, {}; {runs} runs each; two groups of ten; eight visits", today())];
    lines
        .push("fault,right check,runs,right check lit,lower limit (95 %),any check lit,upper limit (95 %)".to_string());
    for (fault, keys, name) in FAULTS {
        let (mut right, mut any) = (0, 0);
        for seed in 0..runs {
            let found = lit(fault, 10_000 + seed);
            any += u64::from(!found.is_empty());
            right += u64::from(found.iter().any(|key| keys.contains(&key.as_str())));
        }
        let lower = if keys.is_empty() { String::new() } else { format!("{:.3}", wilson(right, runs)[0]) };
        let upper = wilson(any, runs)[1];
        lines.push(format!("{name},{},{runs},{right},{lower},{any},{upper:.3}", keys.join(" or ")));
        println!("{}", lines[lines.len() - 1]);
    }
    if let Some(file) = words.next()
        && let Err(error) = std::fs::write(&file, lines.join("\n") + "\n")
    {
        eprintln!("{file}: {error}");
        std::process::exit(1);
    }
}

/// Limits of a share at 95 % (Wilson 1927, JASA 22:209).
fn wilson(count: u64, runs: u64) -> [f64; 2] {
    let (n, z) = (runs as f64, 1.959_964);
    let p = count as f64 / n;
    let middle = p + z * z / (2.0 * n);
    let reach = z * (p * (1.0 - p) / n + z * z / (4.0 * n * n)).sqrt();
    [(middle - reach) / (1.0 + z * z / n), (middle + reach) / (1.0 + z * z / n)]
}

/// Today's date (UTC) as year-month-day; days to dates by Hinnant's algorithm (from memory).
fn today() -> String {
    let now = std::time::SystemTime::now().duration_since(std::time::UNIX_EPOCH).map_or(0, |d| d.as_secs());
    let z = (now / 86_400) as i64 + 719_468;
    let era = z / 146_097;
    let doe = z - era * 146_097;
    let yoe = (doe - doe / 1460 + doe / 36_524 - doe / 146_096) / 365;
    let doy = doe - (365 * yoe + yoe / 4 - yoe / 100);
    let mp = (5 * doy + 2) / 153;
    let (day, month) = (doy - (153 * mp + 2) / 5 + 1, if mp < 10 { mp + 3 } else { mp - 9 });
    format!("{}-{month:02}-{day:02}", yoe + era * 400 + i64::from(month <= 2))
}
