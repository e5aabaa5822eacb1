//! Information in real-valued readings, and what an unknown shared by two readings does to the odds.
//!
//! Numbers: quadrature and closed forms at 40 digits (reference tables, parts 2a and 2b).

use straypath::belief::odds::{entropy, posterior};
use straypath::numeric::quadrature::gauss_legendre;
use straypath::numeric::special::{exp, ln, ln_normal_pdf, log_sum_exp, normal_cdf, normal_pdf};
use straypath::plan::information::{Gross, Kernel, QUICK_ERROR, Question, Shape};

use super::close;

/// P(H1), separation in σ, I(H; Y) in bits, least error, H(H), Fano's floor on the error.
const TWO_HYPOTHESES: [[f64; 6]; 18] = [
    [
        0.5,
        0.5,
        0.0437299629443095,
        0.401293674317,
        1.0,
        0.3775177939,
    ],
    [
        0.5,
        1.0,
        0.160747219796417,
        0.308537538726,
        1.0,
        0.2684645893,
    ],
    [
        0.5,
        2.0,
        0.485944154132935,
        0.158655253931,
        1.0,
        0.1147420774,
    ],
    [
        0.5,
        3.0,
        0.759979007771231,
        0.0668072012689,
        1.0,
        0.03950564747,
    ],
    [
        0.5,
        4.0,
        0.912822285774482,
        0.0227501319482,
        1.0,
        0.01097316682,
    ],
    [
        0.5,
        6.0,
        0.994446709676063,
        0.00134989803163,
        1.0,
        0.0004411259946,
    ],
    [
        0.1,
        0.5,
        0.0160411593078666,
        0.0999998312749,
        0.468995593589,
        0.09500365514,
    ],
    [
        0.1,
        1.0,
        0.0616640602635653,
        0.0986636939005,
        0.468995593589,
        0.08146821702,
    ],
    [
        0.1,
        2.0,
        0.204892135970072,
        0.0700606858585,
        0.468995593589,
        0.04484998353,
    ],
    [
        0.1,
        3.0,
        0.34013713264268,
        0.0336510851365,
        0.468995593589,
        0.01779225492,
    ],
    [
        0.1,
        4.0,
        0.420775384349054,
        0.0122004439112,
        0.468995593589,
        0.005369913135,
    ],
    [
        0.1,
        6.0,
        0.465817508635575,
        0.000765127471974,
        0.468995593589,
        0.0002355105992,
    ],
    [
        0.01,
        0.5,
        0.00178294355056101,
        0.01,
        0.0807931358959,
        0.009731850692,
    ],
    [
        0.01,
        1.0,
        0.00709255974810101,
        0.00999996154272,
        0.0807931358959,
        0.008942864005,
    ],
    [
        0.01,
        2.0,
        0.026907173165196,
        0.00951057485768,
        0.0807931358959,
        0.006131979867,
    ],
    [
        0.01,
        3.0,
        0.0510843376758962,
        0.00633018829014,
        0.0807931358959,
        0.003029242801,
    ],
    [
        0.01,
        4.0,
        0.0685934316828267,
        0.00278480596167,
        0.0807931358959,
        0.001079929165,
    ],
    [
        0.01,
        6.0,
        0.0798940518220468,
        0.000209527820702,
        0.0807931358959,
        5.793904539e-5,
    ],
];

fn bell(mean: f64, sd: f64) -> [Kernel; 1] {
    [Kernel {
        weight: 1.0,
        shape: Shape::Bell { mean, sd },
    }]
}

/// Information of normal readings, one for each hypothesis, held to the quick form too.
fn normal_channel(prior: &[f64], bells: &[[Kernel; 1]], gross: Option<Gross>) -> f64 {
    let group: Vec<usize> = (0..prior.len()).collect();
    let forecasts: Vec<&[Kernel]> = bells.iter().map(|b| b.as_slice()).collect();
    let question = Question {
        prior,
        group: &group,
        forecasts: &forecasts,
        gross,
    };
    let bits = question.information();
    close(
        question.quick_information(),
        bits,
        QUICK_ERROR,
        "quick information",
    );
    bits
}

#[test]
fn two_hypotheses() {
    for [p, d, bits, error, whole, floor] in TWO_HYPOTHESES {
        let what = format!("P = {p}, d = {d}");
        let got = normal_channel(&[1.0 - p, p], &[bell(0.0, 1.0), bell(d, 1.0)], None);
        close(got, bits, 1e-10, &what);
        close(entropy(&[p, 1.0 - p]), whole, 1e-10, &what);
        // The best guess flips where p φ(y − d) = (1 − p) φ(y).
        let flip = d / 2.0 + ln((1.0 - p) / p) / d;
        close(
            p * normal_cdf(flip - d) + (1.0 - p) * normal_cdf(-flip),
            error,
            1e-10,
            &what,
        );
        // Fano: the error whose entropy is what the reading leaves, by bisection.
        let (mut low, mut high) = (0.0, 0.5);
        for _ in 0..100 {
            let middle = 0.5 * (low + high);
            if entropy(&[middle, 1.0 - middle]) < whole - got {
                low = middle;
            } else {
                high = middle;
            }
        }
        close(low, floor, 1e-9, &what);
    }
}

#[test]
fn four_hypotheses() {
    let rows: [([f64; 4], [f64; 4], f64); 3] = [
        ([0.0, 1.0, 2.0, 3.0], [1.0; 4], 0.490468446788791),
        ([0.0, 3.0, 6.0, 9.0], [1.0; 4], 1.49612717656895),
        (
            [0.0, 0.0, 5.0, 5.0],
            [1.0, 3.0, 1.0, 3.0],
            0.832070333866154,
        ),
    ];
    for (means, sds, bits) in rows {
        let bells: Vec<_> = means.iter().zip(sds).map(|(&m, s)| bell(m, s)).collect();
        let got = normal_channel(&[0.4, 0.3, 0.2, 0.1], &bells, None);
        close(got, bits, 1e-10, "four hypotheses");
    }
}

#[test]
fn gross_errors() {
    // Share, separation, bits, the most that one reading can say (nat).
    let rows = [
        (0.01, 2.0, 0.478031388082, 5.10833),
        (0.01, 4.0, 0.896925794819, 7.40265),
        (0.01, 8.0, 0.979419020689, 7.61135),
        (0.05, 2.0, 0.450179903857, 4.22403),
        (0.05, 4.0, 0.841788738221, 5.87418),
        (0.05, 8.0, 0.913607080554, 5.96275),
    ];
    for (share, d, bits, most) in rows {
        let wide = bell(d / 2.0, 20.0);
        let gross = Some(Gross {
            share,
            forecast: &wide,
        });
        let got = normal_channel(&[0.5, 0.5], &[bell(0.0, 1.0), bell(d, 1.0)], gross);
        close(got, bits, 1e-10, "with gross errors");
        let density = |y: f64, mean: f64| {
            (1.0 - share) * normal_pdf(y - mean) + share * exp(ln_normal_pdf(y, d / 2.0, 20.0))
        };
        let said = (0..200_000)
            .map(|i| d / 2.0 + f64::from(i) * 1e-4)
            .map(|y| ln(density(y, d) / density(y, 0.0)))
            .fold(0.0, f64::max);
        // The table's own search over y was coarser.
        close(said, most, 2e-4, "the most that one reading says");
    }
}

/// y₁ = θ + e₁, y₂ = 3 H + θ + e₂; θ ~ N(0, 5²) shared by both readings, e ~ N(0, 1).
#[test]
fn an_unknown_shared_by_two_readings() {
    let (y1, y2) = (6.0, 9.0);
    // ∫ p(θ) p(y₁ | θ) p(y₂ | θ) dθ on 40 panels between ±40.
    let shared = |offset: f64| {
        let terms: Vec<f64> = (0..40)
            .flat_map(|panel| {
                gauss_legendre(16).into_iter().map(move |(x, w)| {
                    let theta = -40.0 + 2.0 * f64::from(panel) + 1.0 + x;
                    ln(w)
                        + ln_normal_pdf(theta, 0.0, 5.0)
                        + ln_normal_pdf(y1, theta, 1.0)
                        + ln_normal_pdf(y2, theta + offset, 1.0)
                })
            })
            .collect();
        log_sum_exp(&terms)
    };
    let evidence = [shared(0.0), shared(3.0)];
    close(evidence[0], -7.156731059242, 1e-11, "shared, H0");
    close(evidence[1], -4.509672235713, 1e-11, "shared, H1");
    let half = [ln(0.5); 2];
    close(
        posterior(&half, &evidence).0[1],
        0.933829481118,
        1e-11,
        "shared, P(H1)",
    );

    let sd = 26.0_f64.sqrt();
    let redrawn =
        [0.0, 3.0].map(|offset| ln_normal_pdf(y1, 0.0, sd) + ln_normal_pdf(y2, offset, sd));
    close(redrawn[0], -7.345973604431, 1e-11, "redrawn, H0");
    close(redrawn[1], -6.480588989046, 1e-11, "redrawn, H1");
    close(
        posterior(&half, &redrawn).0[1],
        0.703784425787,
        1e-11,
        "redrawn, P(H1)",
    );

    // Both readings are worth one of this separation: 3 √(26 / (26² − 25²)), or 3 / √26 where θ is redrawn.
    for (d, separation, bits) in [
        (
            3.0 * (26.0_f64 / 51.0).sqrt(),
            2.142016641886,
            0.531267751143,
        ),
        (3.0 / sd, 0.588348405415, 0.059864675528),
    ] {
        close(d, separation, 1e-11, "separation");
        let got = normal_channel(&[0.5, 0.5], &[bell(0.0, 1.0), bell(d, 1.0)], None);
        close(got, bits, 1e-10, "information of the pair");
    }
}
