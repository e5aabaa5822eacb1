//! Inference and information against numbers worked out elsewhere, by exact arithmetic and independent engines.

mod asia;
mod decisions;
mod readings;

/// Fails unless `got` is within `tolerance` of `want`.
fn close(got: f64, want: f64, tolerance: f64, what: &str) {
    assert!(
        (got - want).abs() <= tolerance,
        "{what}: {got} is not {want} to {tolerance}"
    );
}
