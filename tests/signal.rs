//! The signal room against a general numeric library, closed forms and definitions.
//!
//! The numbers named NumPy and SciPy were printed by NumPy 2.4.6 and SciPy 1.17.1 from the same
//! signal: `y = scipy.signal.lfilter([1], A, numpy.arange(1200) % 97 == 0) / 8`, rounded to 32-bit
//! floats, where `A` has the poles of [`RESONANCES`] at 16 kHz.

use std::f64::consts::PI;

use isophone::signal::discrete::{self, Line};
use isophone::signal::factors::Factors;
use isophone::signal::follow::FactorFinder;
use isophone::signal::prediction::{BandAutocorrelation, levinson};
use isophone::signal::roots::RootFinder;
use isophone::signal::spectrum::PowerSpectrum;
use isophone::signal::window;
use proptest::prelude::*;

const RATE_HZ: f64 = 16_000.0;

/// Points of the Fourier transform, and so the distance of its bins.
const POINTS: usize = 1024;
const BIN_HZ: f64 = RATE_HZ / POINTS as f64;

/// Frequency and bandwidth in hertz.
const RESONANCES: [(f64, f64); 4] = [
    (500.0, 80.0),
    (1500.0, 100.0),
    (2500.0, 130.0),
    (3500.0, 180.0),
];

/// Coefficients of the product of two polynomials.
fn times(a: &[f64], b: &[f64]) -> Vec<f64> {
    let mut out = vec![0.0; a.len() + b.len() - 1];
    for (i, x) in a.iter().enumerate() {
        for (j, y) in b.iter().enumerate() {
            out[i + j] += x * y;
        }
    }
    out
}

/// The prediction polynomial of resonances at a sampling rate.
fn polynomial(resonances: &[(f64, f64)], rate_hz: f64) -> Vec<f64> {
    resonances.iter().fold(vec![1.0], |a, &(hz, width_hz)| {
        let radius = (-PI * width_hz / rate_hz).exp();
        let angle = 2.0 * PI * hz / rate_hz;
        times(&a, &[1.0, -2.0 * radius * angle.cos(), radius * radius])
    })
}

/// A pulse every 97 samples through the resonances.
fn voice() -> Vec<f32> {
    let a = polynomial(&RESONANCES, RATE_HZ);
    let mut y = vec![0.0; 1200];
    for n in 0..y.len() {
        y[n] = if n % 97 == 0 { 1.0 } else { 0.0 };
        for (k, c) in a.iter().enumerate().skip(1) {
            if n >= k {
                y[n] -= c * y[n - k];
            }
        }
    }
    y.iter().map(|y| (y / 8.0) as f32).collect()
}

fn power_of_voice() -> Vec<f32> {
    PowerSpectrum::new(&window::hann(800), POINTS)
        .at(&voice(), 600)
        .to_vec()
}

/// Autocorrelation of the voice below a ceiling, lag 0 as one.
fn lags(ceiling_hz: f64) -> Vec<f64> {
    let mut lags = vec![0.0; 15];
    BandAutocorrelation::new(BIN_HZ, ceiling_hz, 14).lags(&power_of_voice(), &mut lags);
    let first = lags[0];
    lags.iter().map(|r| r / first).collect()
}

/// Prediction polynomial of one order and its residual.
fn predict(lags: &[f64], order: usize) -> (Vec<f64>, f64) {
    let mut last = (Vec::new(), f64::NAN);
    levinson(lags, order, |n, a, residual| {
        if n == order {
            last = (a.to_vec(), residual);
        }
    })
    .expect("a positive spectrum");
    last
}

fn factor(a: &[f64]) -> Option<Factors> {
    let mut factors = [None];
    FactorFinder::default().follow(a.len() - 1, a, &mut factors);
    factors[0]
}

/// Angle and radius of the roots above the real axis, by angle, as each of the two finders sees
/// them.
fn upper_roots(a: &[f64]) -> [Vec<(f64, f64)>; 2] {
    let mut finder = RootFinder::default();
    let roots = finder.upper_half(a).expect("converges").iter();
    let factors = factor(a).expect("found");
    let mut both = [
        roots
            .filter(|z| z.im > 0.0)
            .map(|z| (z.im.atan2(z.re), z.re.hypot(z.im)))
            .collect::<Vec<_>>(),
        factors
            .pairs()
            .iter()
            .filter_map(|p| Some((p.angle()?, p.product.sqrt())))
            .collect(),
    ];
    for roots in &mut both {
        roots.sort_by(|x, y| x.0.total_cmp(&y.0));
    }
    both
}

#[track_caller]
fn assert_near(found: &[f64], expected: &[f64], tolerance: f64) {
    assert_eq!(found.len(), expected.len());
    for (k, (x, y)) in found.iter().zip(expected).enumerate() {
        assert!((x - y).abs() <= tolerance, "{k}: {x} for {y}");
    }
}

#[test]
fn power_spectrum_agrees_with_numpy() {
    // numpy.abs(numpy.fft.rfft(y[200:1000] * w, 1024)) ** 2 with
    // w = 0.5 - 0.5 * numpy.cos(2 * numpy.pi * (numpy.arange(800) + 0.5) / 800).
    let expected = [
        (0, 921.1237908),
        (10, 937.9971673),
        (32, 48281.74952),
        (33, 11692.42461),
        (96, 6358.875808),
        (97, 286.9769155),
        (160, 123.1479901),
        (224, 0.06463148400),
    ];
    let power = power_of_voice();
    for (bin, expected) in expected {
        let found = f64::from(power[bin]);
        // 32-bit sums of 800 products around the spectrum's peak: 1e-7 of its amplitude.
        let tolerance = 1e-5 * expected + 1e-6 * (expected * f64::from(power[32])).sqrt();
        assert!(
            (found - expected).abs() < tolerance,
            "bin {bin}: {found} for {expected}"
        );
    }
}

/// 32-bit tables and power: eight digits less two for sums over some hundred bins.
const LAG_TOLERANCE: f64 = 1e-6;

/// numpy.fft.irfft(power[:321])[:15], over its first: the autocorrelation whose spectrum is the
/// power below 5000 Hz.
const LAGS_BELOW_5000_HZ: [f64; 15] = [
    1.000000000000e+00,
    8.469944592020e-01,
    5.186764548865e-01,
    2.364875803967e-01,
    8.133152885659e-02,
    3.341020830437e-03,
    -6.985697976700e-02,
    -2.034085128833e-01,
    -4.369595541469e-01,
    -7.079218969670e-01,
    -8.453242268736e-01,
    -7.396884833096e-01,
    -4.785369853116e-01,
    -2.348746814717e-01,
    -8.809696405869e-02,
];

#[test]
fn autocorrelation_of_a_band_agrees_with_numpy() {
    assert_near(&lags(5000.0), &LAGS_BELOW_5000_HZ, LAG_TOLERANCE);
    // numpy.fft.irfft(power)[:15], over its first: the whole band.
    let whole = [
        1.000000000000e+00,
        9.370674530079e-01,
        7.718579339536e-01,
        5.609162449900e-01,
        3.623693033410e-01,
        2.104213912620e-01,
        1.099175775484e-01,
        4.714706135309e-02,
        3.341008029787e-03,
        -3.875728790340e-02,
        -9.516145981273e-02,
        -1.814411185181e-01,
        -3.082536836460e-01,
        -4.716358359921e-01,
        -6.453046405938e-01,
    ];
    assert_near(&lags(8000.0), &whole, LAG_TOLERANCE);
}

/// numpy.r_[1, scipy.linalg.solve_toeplitz(r[:12], -r[1:13])] of the lags below 5000 Hz.
const PREDICTION_12: [f64; 13] = [
    1.000000000000e+00,
    -2.943473863128e+00,
    5.314540295881e+00,
    -7.527264545924e+00,
    9.090452327028e+00,
    -9.693351087009e+00,
    9.313791195893e+00,
    -8.059051828179e+00,
    6.135927713861e+00,
    -3.755739205857e+00,
    1.910181943783e+00,
    -7.489664415687e-01,
    1.758315106384e-01,
];

#[test]
fn levinson_agrees_with_scipy() {
    // A hundredth of the power is left, so rounding counts a hundred times and more.
    let (a, residual) = predict(&LAGS_BELOW_5000_HZ, 12);
    assert_near(&a, &PREDICTION_12, 1e-9);
    // r[0] + numpy.dot(scipy.linalg.solve_toeplitz(r[:12], -r[1:13]), r[1:13])
    assert!((residual - 0.011672090393283652).abs() < 1e-10);
    let (a, residual) = predict(&LAGS_BELOW_5000_HZ, 8);
    // The same with 8 in place of 12.
    let expected = [
        1.000000000000e+00,
        -2.357539703766e+00,
        3.556376938716e+00,
        -4.171531936878e+00,
        4.063331236328e+00,
        -3.365940868861e+00,
        2.378819948666e+00,
        -1.412713178349e+00,
        6.480394427384e-01,
    ];
    assert_near(&a, &expected, 1e-9);
    assert!((residual - 0.01851536896592676).abs() < 1e-10);
}

#[test]
fn roots_agree_with_numpy() {
    // numpy.roots of the above, numpy.angle and numpy.abs, those in the upper half.
    let twelve = [
        (3.091027406109e-01, 9.853351985838e-01),
        (5.393915155555e-01, 6.657945235972e-01),
        (9.380509723322e-01, 9.807622538285e-01),
        (1.556534246555e+00, 9.552637339392e-01),
        (1.665650046965e+00, 7.091661752534e-01),
        (2.198010594761e+00, 9.620310548904e-01),
    ];
    // The same of order 12 in the whole band: two of its roots are real.
    let with_real_roots = [
        1.000000000000e+00,
        -5.017602403303e+00,
        1.255236825337e+01,
        -2.034081305956e+01,
        2.328942118650e+01,
        -1.928309775278e+01,
        1.128584696143e+01,
        -4.258576197275e+00,
        7.411278497499e-01,
        9.340197891601e-02,
        -6.951051056534e-02,
        2.899357675973e-02,
        -3.554318194680e-03,
    ];
    let five = [
        (1.946820407437e-01, 9.911044178700e-01),
        (5.846477402315e-01, 9.860100997433e-01),
        (9.762575761162e-01, 9.777274509931e-01),
        (1.370450318099e+00, 9.656477544513e-01),
        (1.479389849695e+00, 3.019350660413e-01),
    ];
    // 1e-8 is 0.00002 Hz at 16 kHz; the coefficients above have twelve or thirteen digits.
    for found in upper_roots(&PREDICTION_12) {
        for ((angle, radius), (x, y)) in twelve.iter().zip(found) {
            assert_near(&[x, y], &[*angle, *radius], 1e-8);
        }
    }
    for found in upper_roots(&with_real_roots) {
        assert_eq!(found.len(), five.len());
        for ((angle, radius), (x, y)) in five.iter().zip(found) {
            assert_near(&[x, y], &[*angle, *radius], 1e-8);
        }
    }
    let factors = factor(&with_real_roots).expect("found");
    let real = factors
        .pairs()
        .iter()
        .find(|p| p.angle().is_none())
        .expect("a pair of real roots");
    let (low, high) = (-2.737256064931e-01, 1.673166389598e-01);
    assert_near(&[real.sum, real.product], &[low + high, low * high], 1e-8);
}

#[test]
fn known_resonances_come_back_with_their_bandwidths() {
    // Closed form: the power spectrum of an all-pole filter, sampled at the bins of a band, predicted
    // with its own order. Trapezoid sums of it are exact but for r^(2 * 320) of the narrowest pole.
    let ceiling_hz = 5000.0;
    let a = polynomial(&RESONANCES, 2.0 * ceiling_hz);
    let power: Vec<f32> = (0..=320)
        .map(|bin| {
            let w = PI * f64::from(bin) * BIN_HZ / ceiling_hz;
            let (re, im) = a.iter().enumerate().fold((0.0, 0.0), |(re, im), (k, c)| {
                let (sin, cos) = (w * k as f64).sin_cos();
                (re + c * cos, im + c * sin)
            });
            (1.0 / (re * re + im * im)) as f32
        })
        .collect();
    let mut lags = [0.0; 9];
    BandAutocorrelation::new(BIN_HZ, ceiling_hz, 8).lags(&power, &mut lags);
    let (found, _) = predict(&lags, 8);
    for roots in upper_roots(&found) {
        assert_eq!(roots.len(), RESONANCES.len());
        for ((angle, radius), (hz, width_hz)) in roots.into_iter().zip(RESONANCES) {
            let found_hz = angle * ceiling_hz / PI;
            let found_width_hz = -2.0 * radius.ln() * ceiling_hz / PI;
            // 32-bit power and tables, over the dynamic range of four resonances.
            assert!((found_hz - hz).abs() < 0.05, "{found_hz} for {hz}");
            assert!(
                (found_width_hz - width_hz).abs() < 0.2,
                "{found_width_hz} for {width_hz}"
            );
        }
    }
}

/// The discrete Itakura-Saito error of a model at some lines, with the gain that makes it least:
/// then the mean of the quotients is one, and the mean of their logarithms is left.
fn itakura_saito(a: &[f64], lines: &[Line], ceiling_hz: f64) -> f64 {
    let n = lines.len() as f64;
    let quotients: Vec<f64> = lines
        .iter()
        .map(|line| {
            let (mut re, mut im) = (0.0, 0.0);
            for (k, c) in a.iter().enumerate() {
                let angle = PI * line.hz / ceiling_hz * k as f64;
                re += c * angle.cos();
                im += c * angle.sin();
            }
            line.power * (re * re + im * im)
        })
        .collect();
    let mean = quotients.iter().sum::<f64>() / n;
    mean.ln() - quotients.iter().map(|q| q.ln()).sum::<f64>() / n
}

#[test]
fn discrete_modelling_makes_its_error_least() {
    // By the definition: whatever coefficient is moved a little either way, the error at the lines
    // grows. The lines are no all-pole spectrum of this order, so that the least error is not zero.
    let (ceiling_hz, f0_hz) = (5000.0, 290.0);
    let a = polynomial(&RESONANCES, 2.0 * ceiling_hz);
    let lines: Vec<Line> = (1..=17)
        .map(|k| {
            let hz = f64::from(k) * f0_hz;
            let (mut re, mut im) = (0.0, 0.0);
            for (k, c) in a.iter().enumerate() {
                let angle = PI * hz / ceiling_hz * k as f64;
                re += c * angle.cos();
                im += c * angle.sin();
            }
            Line {
                hz,
                power: (1.0 + 0.3 * f64::from(k % 3)) / (re * re + im * im),
            }
        })
        .collect();
    let mut lags = [0.0; 9];
    for (lag, r) in lags.iter_mut().enumerate() {
        for line in &lines {
            *r += line.power * (PI * line.hz / ceiling_hz * lag as f64).cos();
        }
    }
    let (mut model, _) = predict(&lags, 8);
    let start = itakura_saito(&model, &lines, ceiling_hz);
    for _ in 0..60 {
        discrete::fit(&mut model, &lines, ceiling_hz).expect("fits");
    }
    let least = itakura_saito(&model, &lines, ceiling_hz);
    assert!(least > 1e-3, "the lines are no all-pole spectrum: {least}");
    assert!(least < 0.9 * start, "{least} from {start}");
    for k in 1..model.len() {
        for change in [-2e-3, 2e-3] {
            let mut moved = model.clone();
            moved[k] += change;
            let there = itakura_saito(&moved, &lines, ceiling_hz);
            assert!(there > least, "a{k} by {change}: {there} under {least}");
        }
    }
}

/// A quadratic factor: two conjugate roots, or two real ones, some on the unit circle or outside.
fn quadratic() -> impl Strategy<Value = Vec<f64>> {
    prop_oneof![
        4 => (0.3..1.02f64, 0.02..3.12f64)
            .prop_map(|(radius, angle)| vec![1.0, -2.0 * radius * angle.cos(), radius * radius]),
        1 => (-1.0..1.0f64, -1.0..1.0f64).prop_map(|(x, y)| vec![1.0, -x - y, x * y]),
    ]
}

/// A polynomial of order 2 to 17.
fn any_polynomial() -> impl Strategy<Value = Vec<f64>> {
    (
        prop::collection::vec(quadratic(), 1..9),
        prop::option::of(-1.0..1.0f64),
    )
        .prop_map(|(quadratics, single)| {
            let mut a = quadratics.iter().fold(vec![1.0], |a, q| times(&a, q));
            if let Some(root) = single {
                a = times(&a, &[1.0, -root]);
            }
            a
        })
}

/// What the product of all factors or roots may miss of a coefficient, as a share of the sum of all
/// coefficients' magnitudes.
const PRODUCT_TOLERANCE: f64 = 1e-6;

#[track_caller]
fn assert_same_polynomial(product: &[f64], a: &[f64]) {
    let scale: f64 = a.iter().map(|c| c.abs()).sum();
    assert_near(product, a, PRODUCT_TOLERANCE * scale);
}

fn product(factors: &Factors) -> Vec<f64> {
    let pairs = factors
        .pairs()
        .iter()
        .fold(vec![1.0], |a, p| times(&a, &[1.0, -p.sum, p.product]));
    match factors.single() {
        Some(root) => times(&pairs, &[1.0, -root]),
        None => pairs,
    }
}

proptest! {
    #[test]
    fn roots_multiply_back(a in any_polynomial()) {
        let mut finder = RootFinder::default();
        // Clusters may be refused, but what is given is right.
        if let Ok(roots) = finder.upper_half(&a) {
            let product = roots.iter().fold(vec![1.0], |a, z| {
                if z.im > 0.0 {
                    times(&a, &[1.0, -2.0 * z.re, z.re * z.re + z.im * z.im])
                } else {
                    times(&a, &[1.0, -z.re])
                }
            });
            assert_same_polynomial(&product, &a);
        }
    }

    #[test]
    fn factors_multiply_back_from_any_start(a in any_polynomial(), b in any_polynomial()) {
        let start = factor(&b);
        let mut factors = [start];
        FactorFinder::default().follow(a.len() - 1, &a, &mut factors);
        if let Some(found) = factors[0] {
            assert_same_polynomial(&product(&found), &a);
        }
    }

    #[test]
    fn nothing_makes_the_finders_run_on(a in prop::collection::vec(any::<f64>(), 2..20)) {
        let mut a = a;
        a[0] = 1.0;
        if let Some(found) = factor(&a) {
            prop_assert!(found.pairs().iter().all(|p| p.sum.is_finite() && p.product.is_finite()));
        }
        let _ = RootFinder::default().upper_half(&a);
    }
}

#[test]
fn nearly_all_polynomials_of_speech_are_found() {
    // Refusing is allowed above; here it is counted, on prediction of every order and many bands.
    let power = power_of_voice();
    let mut lags = [0.0; 15];
    let (mut asked, mut found) = (0, 0);
    for ceiling in 35..=76 {
        BandAutocorrelation::new(BIN_HZ, f64::from(ceiling) * 100.0, 14).lags(&power, &mut lags);
        // The band falls too steeply for the highest orders of the widest.
        let _ = levinson(&lags, 14, |order, a, _| {
            if order >= 2 {
                asked += 1;
                found += usize::from(factor(a).is_some());
            }
        });
    }
    assert!(asked > 450, "{asked}");
    assert_eq!(found, asked);
}
