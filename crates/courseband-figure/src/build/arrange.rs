//! Groups in another order and under other names, as a figure is asked for.

use crate::source::{Group, Source, Traces};
use crate::view::View;

/// The same analysis with its groups arranged; `None` where nothing is asked for. An order that is none, and names that
/// would be two groups', are left aside.
pub(super) fn arranged(source: &Source, traces: &Traces, view: &View) -> Option<(Source, Traces)> {
    let count = source.groups.len();
    let order = if is_order(&view.order, count) { view.order.clone() } else { (0..count).collect() };
    let names = names(source, view);
    let in_order = order.iter().copied().eq(0..count);
    let is_same = |(name, group): (&String, &Group)| *name == group.name;
    if source.curves.len() != count || (in_order && names.iter().zip(&source.groups).all(is_same)) {
        return None;
    }
    let (mut to, mut moved) = (source.clone(), traces.clone());
    for gap in &mut to.differences {
        for end in [&mut gap.from, &mut gap.to] {
            if let Some(g) = source.groups.iter().position(|group| group.name == *end) {
                end.clone_from(&names[g]);
            }
        }
    }
    for rate in &mut to.rates {
        if let Some(g) = source.groups.iter().position(|group| group.name == rate.group) {
            rate.group.clone_from(&names[g]);
        }
    }
    to.groups = order.iter().map(|&g| Group { name: names[g].clone(), ..source.groups[g].clone() }).collect();
    to.curves = order.iter().map(|&g| source.curves[g].clone()).collect();
    for group in &mut moved.group {
        *group = order.iter().position(|&g| g == *group as usize).unwrap_or(*group as usize) as u32;
    }
    Some((to, moved))
}

fn is_order(order: &[usize], count: usize) -> bool {
    let mut sorted = order.to_vec();
    sorted.sort_unstable();
    sorted.into_iter().eq(0..count)
}

fn names(source: &Source, view: &View) -> Vec<String> {
    let own = || source.groups.iter().map(|group| group.name.clone());
    let asked = |(k, own): (usize, String)| match view.names.get(k).map(|name| name.trim()) {
        Some(name) if !name.is_empty() => name.to_string(),
        _ => own,
    };
    let names: Vec<String> = own().enumerate().map(asked).collect();
    let mut distinct = names.clone();
    distinct.sort();
    distinct.dedup();
    if distinct.len() == names.len() { names } else { own().collect() }
}

#[cfg(test)]
mod tests {
    use crate::build::describe;
    use crate::figure::{Mark, StripKind};
    use crate::fixture::{source, traces};
    use crate::view::{Panels, View};

    #[test]
    fn groups_are_arranged_and_keep_their_own_numbers() {
        let source = source(3);
        let traces = traces(&source, 6);
        let names = vec!["Control".to_string(), String::new(), "Gel".into()];
        let view = View { order: vec![2, 0, 1], names: names.clone(), ..View::default() };
        let (to, moved) = super::arranged(&source, &traces, &view).unwrap();
        let shown: Vec<&str> = to.groups.iter().map(|g| g.name.as_str()).collect();
        assert_eq!(shown, ["Gel", "Control", "Silver-coated foam dressing"]);
        assert_eq!(to.curves[0].response_mean, source.curves[2].response_mean);
        assert_eq!((to.differences[0].from.as_str(), to.differences[1].to.as_str()), ("Control", "Gel"));
        for (before, after) in traces.group.iter().zip(&moved.group) {
            assert_eq!(view.order[*after as usize], *before as usize);
        }
        // No order, and one name for two groups, change nothing.
        let odd = View { order: vec![0, 0, 1], names: vec!["Gel".into(), "Gel".into()], ..View::default() };
        assert!(super::arranged(&source, &traces, &odd).is_none());
    }

    #[test]
    fn panels_bands_and_subjects_are_drawn_as_asked() {
        let source = source(2);
        let traces = traces(&source, 6);
        let kinds = |view: &View| describe(&source, &traces, view).strips.iter().map(|s| s.kind).collect::<Vec<_>>();
        let panels = |courses, gaps, followed| View { panels: Panels { courses, gaps, followed }, ..View::default() };
        assert_eq!(kinds(&panels(false, true, false)), [StripKind::Gap]);
        assert_eq!(kinds(&panels(false, false, false)), [StripKind::Courses]);
        assert_eq!(kinds(&panels(true, false, true)), [StripKind::Courses, StripKind::Followed]);
        let bare = View { bands: false, points: false, captions: false, ..View::default() };
        let figure = describe(&source, &traces, &bare);
        assert!(figure.strips.iter().all(|strip| strip.caption.is_empty()));
        let of = |k: usize| figure.strips[k].plot.as_ref().map_or(&[][..], |plot| &plot.marks);
        assert!(!of(0).iter().any(|m| matches!(m, Mark::Band { .. } | Mark::Trace { .. } | Mark::Hatch { .. })));
        assert!(of(1).iter().any(|m| matches!(m, Mark::Band { .. })), "a gap keeps its band");
    }
}
