//! Cuts the axis of a reading into panels as fine as the kernels that lie on them.

/// A normal kernel.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Bell {
    pub(super) mean: f64,
    pub(super) sd: f64,
}

impl Bell {
    /// A kernel whose width can be resolved in double precision beside its mean.
    pub(super) fn new(mean: f64, sd: f64) -> Self {
        Self {
            mean,
            sd: sd.max(1e-13 * mean.abs()).max(1e-150),
        }
    }

    fn reaches(&self, from: f64, to: f64, reach: f64) -> bool {
        self.mean + reach * self.sd > from && self.mean - reach * self.sd < to
    }
}

/// Calls `visit(from, to, kernels)` for each panel that a kernel reaches, from left to right.
///
/// A kernel reaches `reach` standard deviations either side; a panel is not wider than `width` standard
/// deviations of the narrowest kernel on it. Found by halving, so cost is kernels × log(range / width).
pub(super) fn panels(
    bells: &[Bell],
    reach: f64,
    width: f64,
    mut visit: impl FnMut(f64, f64, &[usize]),
) {
    let from = bells
        .iter()
        .map(|b| b.mean - reach * b.sd)
        .fold(f64::INFINITY, f64::min);
    let to = bells
        .iter()
        .map(|b| b.mean + reach * b.sd)
        .fold(f64::NEG_INFINITY, f64::max);
    let all: Vec<usize> = (0..bells.len()).collect();
    if from < to {
        halve(bells, (reach, width), (from, to), &all, &mut visit);
    }
}

fn halve(
    bells: &[Bell],
    (reach, width): (f64, f64),
    (from, to): (f64, f64),
    candidates: &[usize],
    visit: &mut impl FnMut(f64, f64, &[usize]),
) {
    let here: Vec<usize> = candidates
        .iter()
        .copied()
        .filter(|&i| bells[i].reaches(from, to, reach))
        .collect();
    if here.is_empty() {
        return;
    }
    let narrowest = here
        .iter()
        .map(|&i| bells[i].sd)
        .fold(f64::INFINITY, f64::min);
    let middle = 0.5 * (from + to);
    if to - from <= width * narrowest || middle <= from || middle >= to {
        visit(from, to, &here);
        return;
    }
    halve(bells, (reach, width), (from, middle), &here, visit);
    halve(bells, (reach, width), (middle, to), &here, visit);
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn panels_cover_every_kernel_and_skip_the_desert() {
        let bells = [Bell::new(0.0, 1.0), Bell::new(1e6, 0.01)];
        let mut covered = 0.0;
        let mut last = f64::NEG_INFINITY;
        panels(&bells, 5.0, 2.0, |from, to, here| {
            assert!(from >= last && to > from);
            assert!(here.iter().all(|&i| to - from <= 2.0 * bells[i].sd));
            last = to;
            covered += to - from;
        });
        assert!((10.1..14.5).contains(&covered), "{covered}");
    }
}
