//! Laplace at the mode by damped Gauss–Newton, then heavy-tailed importance draws round it.
//!
//! Mode of −½|z|² − ½ Σ r²/σ² over the deviates that move a reading; covariance (JᵀJ + I)⁻¹; Student-t
//! draws (ν = 6, scale × 1.1) for those, prior draws for the rest, switches drawn by what the last cloud
//! says of them (design §4; methods: Laplace importance sampling). A poor effective sample size is mended
//! once by refitting mean and covariance to the weighted draws (population Monte Carlo, Cappé et al. 2004).
//!
//! Long because the mode and the draws round it share one problem.

use std::sync::Arc;

use nalgebra::{DMatrix, DVector};

use super::cloud::{Aim, Cloud, Draws, aim, likelihoods, shown, told};
use super::model::Model;
use super::reading::Group;
use super::sight::{Shown, core, slip, slip_share, spread};
use super::world::World;
use crate::knowledge::{ErrorRow, Prior};
use crate::network::params::at_normal;
use crate::network::{Outcome, QuickSolver, Values};
use crate::numeric::rng::{Stream, stratified};
use crate::numeric::special::{StudentT, ln, ln_normal_pdf, normal_cdf, normal_quantile};
use crate::quantity::{Parsed, ParsedValue};

/// Degrees of freedom of the draws.
const DOF: f64 = 6.0;
/// Widening of the fitted covariance's root.
const WIDE: f64 = 1.1;

/// One numeric reading aimed at a world.
struct Target<'a> {
    epoch: usize,
    aim: Aim,
    row: &'a ErrorRow,
    parsed: &'a Parsed,
}

struct Problem<'a> {
    model: &'a Model,
    worlds: &'a mut [World],
    targets: Vec<Target<'a>>,
    params: usize,
}

impl Problem<'_> {
    /// Residual in spreads of each numeric reading at deviates `z` (parameters, then own).
    fn residuals(&mut self, z: &[f64]) -> Vec<f64> {
        let specs = &self.model.network.params.specs;
        let theta: Vec<f64> = specs
            .iter()
            .zip(z)
            .map(|(s, &z)| at_normal(&s.prior, z))
            .collect();
        let own = &z[self.params..];
        for world in self.worlds.iter_mut() {
            let k = world.unknowns.len();
            world.set(&own[..k.min(own.len())]);
        }
        let values = Values {
            theta: &theta,
            common: &self.model.network.common,
        };
        let solvers: Vec<QuickSolver<'_>> = self
            .worlds
            .iter()
            .map(|w| QuickSolver::new(&w.wiring, values))
            .collect();
        self.targets
            .iter()
            .map(|t| {
                let seen = shown(&solvers[t.epoch], &t.aim);
                residual(t, seen)
            })
            .collect()
    }
}

/// Residual in spreads, pulled in where a slip is likelier than the reading.
fn residual(t: &Target<'_>, seen: Shown) -> f64 {
    let Outcome::Number(mean) = seen.outcome else {
        return 4.0;
    };
    let rough = if t.parsed.rough { 4.0 } else { 1.0 };
    let raw = match t.parsed.value {
        ParsedValue::Value { value } if mean.is_finite() => {
            (value - mean) / (spread(t.row, mean, seen.enclosed) * rough)
        }
        ParsedValue::Range { low, high } if mean.is_finite() => {
            let wide = (high - low) / 12f64.sqrt();
            let sd = spread(t.row, mean, seen.enclosed) * rough;
            ((low + high) / 2.0 - mean) / (sd * sd + wide * wide).sqrt()
        }
        ParsedValue::Over { over } if mean.is_finite() => {
            ((over - mean) / (spread(t.row, mean, seen.enclosed) * rough)).max(0.0)
        }
        ParsedValue::Under { under } if mean.is_finite() => {
            ((under - mean) / (spread(t.row, mean, seen.enclosed) * rough)).min(0.0)
        }
        ParsedValue::Over { .. } => 0.0,
        _ => 4.0,
    };
    let share = slip_share(
        t.row,
        core(t.row, seen, t.parsed, 1.0, 0.0),
        slip(t.row, seen, t.parsed, 1.0),
    );
    raw.clamp(-30.0, 30.0) * (1.0 - share).max(0.05).sqrt()
}

/// Refits a cloud to all readings over the parameters in `levers`; `draws` new draws, fixed by the seed.
#[allow(clippy::too_many_arguments)]
pub fn refit(
    model: &Model,
    worlds: &mut [World],
    sound: &World,
    cloud: &Cloud,
    groups: &[Group],
    levers: &[usize],
    draws: usize,
    seed: u64,
) -> Cloud {
    let params = model.network.params.specs.len();
    let own = worlds.iter().map(|w| w.unknowns.len()).max().unwrap_or(0);
    let weights = cloud.weights();
    // Start from the best draw by the softened guide.
    let guide: Vec<f64> = (0..cloud.n())
        .map(|i| cloud.ratio[i] + cloud.soft.iter().map(|g| g[i]).sum::<f64>())
        .collect();
    let best = (0..cloud.n())
        .max_by(|&a, &b| guide[a].total_cmp(&guide[b]))
        .unwrap_or(0);
    let mut start: Vec<f64> = cloud.draws.z(best).to_vec();
    start.extend(cloud.own(best).iter().copied());
    start.resize(params + own, 0.0);
    let mut problem = problem(model, worlds, groups, params);
    let is_switch = |d: usize| {
        d < params && matches!(model.network.params.specs[d].prior, Prior::Switch { .. })
    };
    // Unmoved deviates rest at the prior's centre.
    let mut z = start;
    let mut active = Vec::new();
    for (d, value) in z.iter_mut().enumerate() {
        if d >= params || levers.contains(&d) {
            active.push(d);
        } else if !is_switch(d) {
            *value = 0.0;
        }
    }
    let (mode, root) = gauss_newton(&mut problem, z, &active);
    let mut fitted = sample(
        model,
        problem.worlds,
        sound,
        cloud,
        groups,
        &weights,
        &mode,
        &root,
        &active,
        draws,
        seed,
        1,
    );
    if fitted.effective() < draws as f64 / 6.0 && !active.is_empty() {
        // Weighted mean and covariance of what was drawn, shrunk toward the Laplace root.
        let w = fitted.weights();
        let (mode, root) = moments(&fitted, &w, &mode, &root, &active, params);
        let second = sample(
            model,
            problem.worlds,
            sound,
            cloud,
            groups,
            &weights,
            &mode,
            &root,
            &active,
            draws,
            seed,
            2,
        );
        if second.effective() > fitted.effective() {
            fitted = second;
        }
    }
    fitted
}

/// Parameters that every earth fault leans on, whatever the sound installation shows.
const ALWAYS: [&str; 5] = [
    "supply.volts",
    "supply.network_ohms",
    "supply.network_earth_ohms",
    "earthing.electrode_ohms",
    "stake_ohms",
];

/// Parameters that move a group of readings at the sound installation, and those that always count.
pub fn levers(model: &Model, worlds: &mut [World], group: &Group) -> Vec<usize> {
    let specs = &model.network.params.specs;
    let params = specs.len();
    let moves = |d: usize| !matches!(specs[d].prior, Prior::Fixed { .. } | Prior::Switch { .. });
    let mut out: Vec<usize> = ALWAYS
        .iter()
        .filter_map(|path| model.network.params.id(path))
        .map(|id| id.0)
        .filter(|&d| moves(d))
        .collect();
    let mut problem = problem(model, worlds, std::slice::from_ref(group), params);
    if problem.targets.is_empty() {
        return Vec::new();
    }
    let mut z = vec![0.0; params];
    let base = problem.residuals(&z);
    for d in (0..params).filter(|&d| moves(d)) {
        z[d] = 0.5;
        let moved = problem.residuals(&z);
        z[d] = 0.0;
        let most = moved
            .iter()
            .zip(&base)
            .map(|(a, b)| (a - b).abs())
            .fold(0.0, f64::max);
        if most > 0.2 && !out.contains(&d) {
            out.push(d);
        }
    }
    out
}

fn problem<'a>(
    model: &'a Model,
    worlds: &'a mut [World],
    groups: &'a [Group],
    params: usize,
) -> Problem<'a> {
    let mut targets = Vec::new();
    for group in groups {
        for reading in &group.readings {
            if matches!(reading.parsed.value, ParsedValue::Word { .. }) {
                continue;
            }
            let epoch = reading.epoch.min(worlds.len().saturating_sub(1));
            let Some(world) = worlds.get(epoch) else {
                continue;
            };
            if told(world, reading).is_some() {
                continue;
            }
            let (Some(aim), Some(row)) = (
                aim(world, &reading.setup, &reading.hookup),
                model.knowledge.error_of(&reading.hookup),
            ) else {
                continue;
            };
            targets.push(Target {
                epoch,
                aim,
                row,
                parsed: &reading.parsed,
            });
        }
    }
    Problem {
        model,
        worlds,
        targets,
        params,
    }
}

fn objective(z: &[f64], active: &[usize], r: &[f64]) -> f64 {
    let prior: f64 = active.iter().map(|&d| z[d] * z[d]).sum();
    prior + r.iter().map(|x| x * x).sum::<f64>()
}

/// The mode, and a lower-triangular root of the covariance over the active deviates.
fn gauss_newton(
    problem: &mut Problem<'_>,
    mut z: Vec<f64>,
    active: &[usize],
) -> (Vec<f64>, DMatrix<f64>) {
    let k = active.len();
    let mut root = DMatrix::identity(k, k);
    if k == 0 {
        return (z, root);
    }
    let mut r = problem.residuals(&z);
    for round in 0..4 {
        let m = r.len();
        let mut j = DMatrix::zeros(m, k);
        for (col, &d) in active.iter().enumerate() {
            let keep = z[d];
            let step = 0.05;
            z[d] = keep + step;
            let up = problem.residuals(&z);
            z[d] = keep;
            for row in 0..m {
                j[(row, col)] = (up[row] - r[row]) / step;
            }
        }
        let rv = DVector::from_column_slice(&r);
        let zv = DVector::from_iterator(k, active.iter().map(|&d| z[d]));
        let h = j.transpose() * &j + DMatrix::identity(k, k);
        let Some(chol) = h.clone().cholesky() else {
            break;
        };
        // covariance = H⁻¹ = L⁻ᵀ L⁻¹
        if let Some(inverse) = chol.l().try_inverse() {
            root = inverse.transpose();
        }
        if round == 3 {
            break;
        }
        let gradient = j.transpose() * &rv + &zv;
        let step = chol.solve(&gradient);
        let before = objective(&z, active, &r);
        let mut scale = 1.0;
        let mut gained = 0.0;
        for _ in 0..5 {
            let mut trial = z.clone();
            for (i, &d) in active.iter().enumerate() {
                trial[d] = (z[d] - scale * step[i]).clamp(-6.0, 6.0);
            }
            let tr = problem.residuals(&trial);
            let after = objective(&trial, active, &tr);
            if after < before {
                gained = before - after;
                z = trial;
                r = tr;
                break;
            }
            scale *= 0.35;
        }
        if gained < 0.05 {
            break;
        }
    }
    (z, root)
}

fn moments(
    cloud: &Cloud,
    weights: &[f64],
    mode: &[f64],
    root: &DMatrix<f64>,
    active: &[usize],
    params: usize,
) -> (Vec<f64>, DMatrix<f64>) {
    let k = active.len();
    let value = |i: usize, d: usize| {
        if d < params {
            cloud.draws.z(i)[d]
        } else {
            cloud.own(i)[d - params]
        }
    };
    let mut mean = vec![0.0; k];
    for (i, w) in weights.iter().enumerate() {
        for (m, &d) in mean.iter_mut().zip(active) {
            *m += w * value(i, d);
        }
    }
    let mut cov = root * root.transpose() * 0.3;
    for (i, w) in weights.iter().enumerate() {
        for a in 0..k {
            for b in 0..k {
                cov[(a, b)] +=
                    w * (value(i, active[a]) - mean[a]) * (value(i, active[b]) - mean[b]);
            }
        }
    }
    let mut centre = mode.to_vec();
    for (m, &d) in mean.iter().zip(active) {
        centre[d] = *m;
    }
    match cov.cholesky() {
        Some(chol) => (centre, chol.l()),
        None => (centre, root.clone()),
    }
}

#[allow(clippy::too_many_arguments)]
fn sample(
    model: &Model,
    worlds: &mut [World],
    sound: &World,
    old: &Cloud,
    groups: &[Group],
    weights: &[f64],
    mode: &[f64],
    root: &DMatrix<f64>,
    active: &[usize],
    n: usize,
    seed: u64,
    round: u64,
) -> Cloud {
    let specs = &model.network.params.specs;
    let params = specs.len();
    let own = mode.len() - params;
    let k = active.len();
    let mut stream = Stream::new(seed, "refit", round);
    // One column for the t's scale, then a uniform per deviate.
    let u = stratified(n, params + own + 1, &mut stream);
    let width = params + own + 1;
    // How likely each switch is on, by the last cloud.
    let on: Vec<Option<f64>> = (0..params)
        .map(|d| match specs[d].prior {
            Prior::Switch { p } if p > 0.0 && p < 1.0 => {
                let share: f64 = weights
                    .iter()
                    .enumerate()
                    .filter(|(i, _)| old.draws.theta(*i)[d] > 0.5)
                    .map(|(_, w)| w)
                    .sum();
                Some((0.85 * share + 0.15 * p).clamp(0.02, 0.98))
            }
            _ => None,
        })
        .collect();
    let mut z_all = Vec::with_capacity(n * params);
    let mut own_all = Vec::with_capacity(n * own);
    let mut ratio = Vec::with_capacity(n);
    let log_det: f64 = (0..k)
        .map(|i| ln(root[(i, i)].abs().max(1e-12) * WIDE))
        .sum();
    let density = StudentT::new(DOF);
    for i in 0..n {
        let row = &u[i * width..(i + 1) * width];
        // χ² by its Wilson–Hilferty quantile (1931).
        let q = normal_quantile(row[0]);
        let c = 1.0 - 2.0 / (9.0 * DOF) + q * (2.0 / (9.0 * DOF)).sqrt();
        let chi2 = (DOF * c * c * c).max(0.05);
        let scale = (DOF / chi2).sqrt();
        let mut z: Vec<f64> = (0..params + own)
            .map(|d| normal_quantile(row[d + 1]))
            .collect();
        let e = DVector::from_iterator(k, active.iter().map(|&d| z[d]));
        let t = &e * scale;
        let moved = root * &t * WIDE;
        let mut log_ratio = 0.0;
        let r2: f64 = t.iter().map(|x| x * x).sum();
        for (j, &d) in active.iter().enumerate() {
            z[d] = mode[d] + moved[j];
            log_ratio += ln_normal_pdf(z[d], 0.0, 1.0);
        }
        // Multivariate t density at t, and the root's determinant.
        log_ratio -= density.ln_pdf_multi(r2, k) - log_det;
        for (d, q) in on.iter().enumerate() {
            let (Some(q), Prior::Switch { p }) = (*q, &specs[d].prior) else {
                continue;
            };
            let uniform = normal_cdf(z[d]);
            let is_on = uniform < q;
            // Map to the prior's own region of that state.
            let inside = if is_on {
                uniform / q * p
            } else {
                p + (uniform - q) / (1.0 - q) * (1.0 - p)
            };
            z[d] = normal_quantile(inside.clamp(1e-9, 1.0 - 1e-9));
            log_ratio += if is_on {
                ln(p / q)
            } else {
                ln((1.0 - p) / (1.0 - q))
            };
        }
        own_all.extend(z[params..].iter().copied());
        z.truncate(params);
        z_all.extend(z);
        ratio.push(log_ratio);
    }
    let draws = Arc::new(Draws::from_z(model, z_all));
    let mut cloud = Cloud {
        draws,
        own: own_all,
        ratio,
        groups: Vec::new(),
        soft: Vec::new(),
    };
    for group in groups {
        let (l, s) = likelihoods(model, worlds, sound, &cloud, group);
        cloud.groups.push(l);
        cloud.soft.push(s);
    }
    cloud
}
