//! Renders the figure of a table to an SVG file, to look at: `render TABLE PLAN.json VIEW.json OUT.svg`.

use courseband_figure::{Estimate, Source, Traces, View, describe, to_svg};
use courseband_study::{Plan, Study};
use std::error::Error;
use std::fs;

fn main() -> Result<(), Box<dyn Error>> {
    let paths: Vec<String> = std::env::args().skip(1).collect();
    let [table, plan, view, out] = paths.as_slice() else {
        return Err("give TABLE PLAN.json VIEW.json OUT.svg".into());
    };
    let plan = Plan::from_json(&fs::read_to_string(plan)?)?;
    let mut study = Study::open(&fs::read(table)?)?;
    let findings = serde_json::to_string(&study.run(&plan)?)?;
    let source: Source = serde_json::from_str(&findings)?;
    let traces = traces(&study.reading(&plan)?.observations);
    let view: View = serde_json::from_str(&fs::read_to_string(view)?)?;
    fs::write(out, to_svg(&describe(&source, &traces, &view), &Estimate)?)?;
    Ok(())
}

fn traces(observations: &courseband_table::Observations) -> Traces {
    let mut traces = Traces {
        offsets: vec![0],
        time: observations.time.clone(),
        response: observations.response.clone(),
        group: Vec::new(),
    };
    let mut end = 0;
    for rows in observations.subject.chunk_by(|a, b| a == b) {
        end += rows.len() as u32;
        traces.group.push(observations.subjects[rows[0] as usize].group);
        traces.offsets.push(end);
    }
    traces
}
