//! Numbers of trials in a lane above the frame, pushed apart so that each can be read.

use std::vec::Vec;

/// Places for labels wished at `wished` (ascending), at least `gap` apart and between `left` and `right`, with the least sum
/// of squared shifts: the pool-adjacent-violators method (R. E. Barlow, D. J. Bartholomew, J. M. Bremner & H. D. Brunk,
/// Statistical Inference under Order Restrictions (1972), chapter 1). The room must do: `gap (len - 1) <= right - left`.
pub(super) fn apart(wished: &[f64], gap: f64, (left, right): (f64, f64)) -> Vec<f64> {
    // With i gaps taken off, "at least a gap apart" becomes "not descending".
    let mut blocks: Vec<(f64, usize)> = Vec::new();
    for (i, x) in wished.iter().enumerate() {
        let (mut mean, mut count) = (x - gap * i as f64, 1);
        while let Some(&(before, many)) = blocks.last() {
            if before <= mean {
                break;
            }
            mean = (mean * count as f64 + before * many as f64) / (count + many) as f64;
            count += many;
            blocks.pop();
        }
        blocks.push((mean, count));
    }
    let last = right - gap * wished.len().saturating_sub(1) as f64;
    let each = blocks
        .iter()
        .flat_map(|&(mean, count)| core::iter::repeat_n(mean, count));
    each.enumerate()
        .map(|(i, mean)| mean.min(last).max(left) + gap * i as f64)
        .collect()
}

#[cfg(test)]
mod tests {
    use super::apart;

    #[test]
    fn labels_keep_their_distance_and_stay_inside() {
        assert_eq!(apart(&[10.0, 50.0], 10.0, (0.0, 100.0)), [10.0, 50.0]);
        // Three at one place: around it; at the end: inside.
        assert_eq!(apart(&[50.0; 3], 10.0, (0.0, 100.0)), [40.0, 50.0, 60.0]);
        assert_eq!(apart(&[99.0, 99.0], 10.0, (0.0, 100.0)), [90.0, 100.0]);
        assert_eq!(
            apart(&[-5.0, 0.0, 1.0], 10.0, (0.0, 20.0)),
            [0.0, 10.0, 20.0]
        );
        assert!(apart(&[], 10.0, (0.0, 100.0)).is_empty());
    }
}
