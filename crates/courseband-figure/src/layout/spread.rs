//! Labels moved apart as little as possible.

/// Middles of labels, given the middle wished and the height of each, so that none overlap, in the
/// order of the wishes. The sum of squared moves is least (pooling of adjacent violators, as for
/// isotonic regression: Barlow, Bartholomew, Bremner and Brunk 1972). Where they do not fit between
/// `top` and `bottom`, they reach beyond the bottom.
pub(super) fn spread(wishes: &[(f64, f64)], top: f64, bottom: f64) -> Vec<f64> {
    let mut order: Vec<usize> = (0..wishes.len()).collect();
    order.sort_by(|&a, &b| wishes[a].0.total_cmp(&wishes[b].0).then(a.cmp(&b)));
    // With what stands above it subtracted, each label only needs to be no higher than the one before.
    let mut above = 0.0;
    let mut pools: Vec<(f64, usize)> = Vec::new();
    let mut offsets = Vec::new();
    for &k in &order {
        let (middle, height) = wishes[k];
        offsets.push(above + 0.5 * height);
        let mut pool = (middle - above - 0.5 * height, 1);
        while let Some(&(mean, count)) = pools.last()
            && mean > pool.0
        {
            pools.pop();
            pool = ((mean * count as f64 + pool.0 * pool.1 as f64) / (count + pool.1) as f64, count + pool.1);
        }
        pools.push(pool);
        above += height;
    }
    let highest = (bottom - above).max(top);
    let mut places = vec![0.0; wishes.len()];
    let starts = pools.iter().flat_map(|&(start, count)| std::iter::repeat_n(start.clamp(top, highest), count));
    for ((&k, offset), start) in order.iter().zip(offsets).zip(starts) {
        places[k] = start + offset;
    }
    places
}

#[cfg(test)]
mod tests {
    use super::spread;

    fn overlap(wishes: &[(f64, f64)], places: &[f64]) -> bool {
        let mut boxes: Vec<(f64, f64)> =
            wishes.iter().zip(places).map(|(w, p)| (p - 0.5 * w.1, p + 0.5 * w.1)).collect();
        boxes.sort_by(|a, b| a.0.total_cmp(&b.0));
        boxes.windows(2).any(|w| w[1].0 < w[0].1 - 1e-9)
    }

    #[test]
    fn labels_with_room_stay() {
        assert_eq!(spread(&[(80.0, 14.0), (20.0, 28.0)], 0.0, 100.0), [80.0, 20.0]);
    }

    #[test]
    fn crowded_labels_move_apart_evenly_and_stay_inside() {
        let wishes = [(50.0, 10.0), (50.0, 10.0), (51.0, 20.0), (99.0, 10.0), (2.0, 10.0)];
        let places = spread(&wishes, 0.0, 100.0);
        assert!(!overlap(&wishes, &places), "{places:?}");
        assert!(places[0] < places[1] && places[1] < places[2]);
        assert_eq!(places[4], 5.0);
        assert_eq!(places[3], 95.0);
    }

    #[test]
    fn too_many_labels_still_do_not_overlap() {
        let wishes = vec![(5.0, 10.0); 7];
        let places = spread(&wishes, 0.0, 40.0);
        assert!(!overlap(&wishes, &places));
        assert_eq!(places[0], 5.0);
    }
}
