//! Several trends at once: mixtures of von Mises modes by expectation–maximisation, the number of
//! modes by BIC.

use std::f64::consts::TAU;

use rand::Rng as _;
use rayon::prelude::*;

use crate::ground::{Method, Read, Seed, Source, Stopped, Symbol, Work};
use crate::numeric::bessel::{inverse_ratio, ln_i0};

use super::mean::Resultant;
use super::sources::{FISHER, at};

pub static METHOD: Method = Method {
    id: "axial.mixture",
    name: "Mixture of von Mises modes",
    question: "How many trends are there, and which?",
    formula: "f = Σ ωⱼ exp(κⱼ cos(φ − μⱼ))/(2πI₀(κⱼ)) + ω₀/2π; BIC = −2L n_eff/n + p ln n_eff",
    symbols: &[
        Symbol { symbol: "ωⱼ", meaning: "share of mode j; ω₀ of an even background", unit: "1" },
        Symbol {
            symbol: "μⱼ, κⱼ",
            meaning: "mean doubled angle and concentration of mode j",
            unit: "rad, 1",
        },
        Symbol { symbol: "p", meaning: "free numbers: 3K − 1, one more with a background", unit: "1" },
        Symbol {
            symbol: "n_eff",
            meaning: "independent axes: the likelihood of n correlated ones counts for so many",
            unit: "1",
        },
    ],
    assumptions: &["Each trend scatters as a von Mises mode."],
    limits: &[
        "κ is held at 500 and shares at 0.02, lest a mode shrink onto one axis.",
        "Twenty seeded starts; the best of them may still be a local maximum.",
        "Above 360 axes they are gathered into cells of 0.5°, each at its own mean.",
    ],
    sources: &[
        at(FISHER, "§4.6, mixtures"),
        Source {
            key: "schwarz1978",
            authors: "Schwarz, G.",
            year: 1978,
            title: "Estimating the dimension of a model",
            published: "Annals of Statistics 6, 461–464",
            locator: "",
            read: Read::Memory,
        },
    ],
};

/// One mode on the circle.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Component {
    /// μ, radians in [0, 2π).
    pub mean: f64,
    pub kappa: f64,
    pub weight: f64,
}

/// A fitted mixture.
#[derive(Clone, Debug, PartialEq)]
pub struct Mixture {
    /// The heaviest first.
    pub components: Vec<Component>,
    /// Share of the even background; `None` when the model has none.
    pub background: Option<f64>,
    /// L of all axes as if independent.
    pub log_likelihood: f64,
    pub parameters: u32,
    pub bic: f64,
}

/// How to fit.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct MixtureSettings {
    /// Models of 1 to this many modes are compared.
    pub most_modes: u32,
    /// Whether each is also tried with an even background.
    pub background: bool,
    /// Number of independent axes the sample is worth.
    pub n_eff: f64,
}

/// Random starts of each model.
const STARTS: u64 = 20;
/// Steps of each start, and how many of the best go on to the end.
const SHORT: usize = 15;
const FINALISTS: usize = 2;
const LONG: usize = 2000;
/// A step that gains less than this in the likelihood of the independent axes is the last.
const LEAST_GAIN: f64 = 1e-9;
const MOST_KAPPA: f64 = 500.0;
const LEAST_WEIGHT: f64 = 0.02;
const CELLS: usize = 360;

/// All models asked for, the least BIC first. Empty for no axes.
///
/// # Errors
/// [`Stopped`].
pub fn mixtures(
    phi: &[f64],
    weights: Option<&[f64]>,
    settings: MixtureSettings,
    seed: Seed,
    work: &Work,
) -> Result<Vec<Mixture>, Stopped> {
    let data = Data::gather(phi, weights);
    if data.weight <= 0.0 {
        return Ok(Vec::new());
    }
    let mut models = Vec::new();
    for modes in 1..=settings.most_modes.max(1) {
        for background in [false, true] {
            if !background || settings.background {
                models.push(best_fit(&data, modes as usize, background, settings.n_eff, seed, work)?);
            }
        }
    }
    models.sort_by(|a, b| a.bic.total_cmp(&b.bic));
    Ok(models)
}

/// Angles as unit vectors with weights; many are gathered into cells.
struct Data {
    cos: Vec<f64>,
    sin: Vec<f64>,
    mass: Vec<f64>,
    weight: f64,
}

impl Data {
    fn gather(phi: &[f64], weights: Option<&[f64]>) -> Self {
        let w = |i: usize| weights.map_or(1.0, |w| w[i]);
        let mut sums: Vec<Resultant> = Vec::new();
        if phi.len() > CELLS {
            sums.resize(CELLS, Resultant::default());
        }
        for (i, p) in phi.iter().enumerate() {
            let (sin, cos) = p.sin_cos();
            let one = Resultant { cos: w(i) * cos, sin: w(i) * sin, weight: w(i) };
            if phi.len() > CELLS {
                let cell = &mut sums[(p.rem_euclid(TAU) / TAU * CELLS as f64) as usize % CELLS];
                cell.cos += one.cos;
                cell.sin += one.sin;
                cell.weight += one.weight;
            } else {
                sums.push(one);
            }
        }
        sums.retain(|r| r.weight > 0.0);
        let unit = |r: &Resultant| r.direction().sin_cos();
        Self {
            cos: sums.iter().map(|r| unit(r).1).collect(),
            sin: sums.iter().map(|r| unit(r).0).collect(),
            mass: sums.iter().map(|r| r.weight).collect(),
            weight: sums.iter().map(|r| r.weight).sum(),
        }
    }
}

/// A model on its way. Component weights and the background sum to 1.
#[derive(Clone, Debug)]
struct Model {
    components: Vec<Component>,
    background: Option<f64>,
    log_likelihood: f64,
}

fn best_fit(
    data: &Data,
    modes: usize,
    background: bool,
    n_eff: f64,
    seed: Seed,
    work: &Work,
) -> Result<Mixture, Stopped> {
    let label = format!("axial.mixture.{modes}.{background}");
    let climb = |mut model: Model, steps: usize| -> Result<Model, Stopped> {
        for _ in 0..steps {
            work.advance(0)?;
            let before = model.log_likelihood;
            model = step(data, &model);
            if (model.log_likelihood - before) * n_eff / data.weight <= LEAST_GAIN {
                break;
            }
        }
        Ok(model)
    };
    let mut starts: Vec<Model> = (0..STARTS)
        .into_par_iter()
        .map(|start| climb(random_model(data, modes, background, seed, &label, start), SHORT))
        .collect::<Result<_, _>>()?;
    // A stable sort: equal likelihoods keep the order of the starts.
    starts.sort_by(|a, b| b.log_likelihood.total_cmp(&a.log_likelihood));
    starts.truncate(FINALISTS);
    let finals: Vec<Model> =
        starts.into_par_iter().map(|model| climb(model, LONG)).collect::<Result<_, _>>()?;
    let best = finals
        .into_iter()
        .reduce(|best, m| if m.log_likelihood > best.log_likelihood { m } else { best })
        .expect("at least one start");
    let parameters = 3 * modes as u32 - 1 + u32::from(background);
    let mut components = best.components;
    components.sort_by(|a, b| b.weight.total_cmp(&a.weight));
    let likelihood = best.log_likelihood * n_eff / data.weight;
    Ok(Mixture {
        components,
        background: best.background,
        log_likelihood: best.log_likelihood,
        parameters,
        bic: -2.0 * likelihood + f64::from(parameters) * n_eff.max(1.0).ln(),
    })
}

/// Modes at axes drawn from the data, with the concentration of all of it and more.
fn random_model(data: &Data, modes: usize, background: bool, seed: Seed, label: &str, start: u64) -> Model {
    let mut random = seed.stream(label, start);
    let background = background.then_some(0.1);
    let share = (1.0 - background.unwrap_or(0.0)) / modes as f64;
    let components = (0..modes)
        .map(|_| {
            let mut left = random.random::<f64>() * data.weight;
            let pick = data.mass.iter().position(|m| {
                left -= m;
                left <= 0.0
            });
            let i = pick.unwrap_or(data.mass.len() - 1);
            let kappa = (1.0 + 9.0 * random.random::<f64>()) * modes as f64 * 0.5;
            Component { mean: data.sin[i].atan2(data.cos[i]), kappa, weight: share }
        })
        .collect();
    Model { components, background, log_likelihood: f64::NEG_INFINITY }
}

/// One step: responsibilities by log-sum-exp, then weights, means and concentrations. The likelihood
/// returned is that of the model handed in.
fn step(data: &Data, model: &Model) -> Model {
    let k = model.components.len();
    // ln ω − ln 2πI₀(κ), and κ(cos μ, sin μ): the density is then one dot product away.
    let terms: Vec<[f64; 3]> = model
        .components
        .iter()
        .map(|c| {
            let (sin, cos) = c.mean.sin_cos();
            [c.weight.ln() - TAU.ln() - ln_i0(c.kappa), c.kappa * cos, c.kappa * sin]
        })
        .collect();
    let even = model.background.map_or(f64::NEG_INFINITY, |w| w.ln() - TAU.ln());
    let mut sums = vec![Resultant::default(); k];
    let (mut even_mass, mut likelihood) = (0.0, 0.0);
    let mut logs = vec![0.0; k];
    for ((cos, sin), mass) in data.cos.iter().zip(&data.sin).zip(&data.mass) {
        let mut top = even;
        for (log, [constant, x, y]) in logs.iter_mut().zip(&terms) {
            *log = constant + x * cos + y * sin;
            top = top.max(*log);
        }
        let even_part = (even - top).exp();
        let mut all = even_part;
        for log in &mut logs {
            *log = (*log - top).exp();
            all += *log;
        }
        likelihood += mass * (top + all.ln());
        even_mass += mass * even_part / all;
        for (sum, part) in sums.iter_mut().zip(&logs) {
            let r = mass * part / all;
            sum.cos += r * cos;
            sum.sin += r * sin;
            sum.weight += r;
        }
    }
    let floor = |w: f64| (w / data.weight).max(LEAST_WEIGHT);
    let mut components: Vec<Component> = sums
        .iter()
        .map(|s| Component {
            mean: s.direction().rem_euclid(TAU),
            kappa: inverse_ratio(s.mean_length()).min(MOST_KAPPA),
            weight: floor(s.weight),
        })
        .collect();
    let mut background = model.background.map(|_| (even_mass / data.weight).max(1e-6));
    let all = components.iter().map(|c| c.weight).sum::<f64>() + background.unwrap_or(0.0);
    components.iter_mut().for_each(|c| c.weight /= all);
    background = background.map(|w| w / all);
    Model { components, background, log_likelihood: likelihood }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::assert_close;
    use crate::science::axial::von_mises;

    const SETTINGS: MixtureSettings = MixtureSettings { most_modes: 3, background: true, n_eff: 1500.0 };

    fn two_trends(n: usize) -> Vec<f64> {
        let mut random = Seed(21).stream("two", 0);
        (0..n)
            .map(|i| if i % 3 == 0 { (4.0, 8.0) } else { (1.0, 20.0) })
            .map(|(mean, kappa)| von_mises::draw(mean, kappa, &mut random))
            .collect()
    }

    #[test]
    fn two_trends_are_found_in_cells_and_one_by_one() {
        for n in [600, 1500] {
            let settings = MixtureSettings { n_eff: n as f64, ..SETTINGS };
            let best =
                &mixtures(&two_trends(n), None, settings, Seed(1), &Work::quiet()).expect("nobody stops")[0];
            assert_eq!(best.components.len(), 2, "{best:?}");
            assert_close!(best.components[0].weight, 2.0 / 3.0, 0.03, "heavier share");
            assert_close!(best.components[0].mean, 1.0, 0.04, "first mean");
            assert_close!(best.components[1].mean, 4.0, 0.1, "second mean");
        }
    }

    #[test]
    fn few_independent_axes_do_not_make_many_modes() {
        // A rose with shoulders, of many nodes that are worth only a dozen axes.
        let settings = MixtureSettings { n_eff: 12.0, ..SETTINGS };
        let phi: Vec<f64> = (0..1500).map(|i| 1.2 * (f64::from(i) * 0.7).sin()).collect();
        let best = &mixtures(&phi, None, settings, Seed(1), &Work::quiet()).expect("nobody stops")[0];
        assert_eq!(best.components.len(), 1, "{best:?}");
    }

    #[test]
    fn weights_are_repeated_rows_and_threads_change_nothing() {
        let phi = two_trends(60);
        let w: Vec<f64> = (0..60).map(|i| f64::from(i % 3u8 + 1)).collect();
        let rows: Vec<f64> = phi.iter().zip(&w).flat_map(|(p, w)| vec![*p; *w as usize]).collect();
        let fit = |phi: &[f64], w: Option<&[f64]>, threads: usize| {
            let pool = rayon::ThreadPoolBuilder::new().num_threads(threads).build().expect("a thread pool");
            let settings = MixtureSettings { most_modes: 2, background: false, n_eff: 60.0 };
            pool.install(|| mixtures(phi, w, settings, Seed(4), &Work::quiet()).expect("nobody stops"))
        };
        let (weighted, repeated) = (fit(&phi, Some(&w), 1), fit(&rows, None, 1));
        assert_close!(weighted[0].bic, repeated[0].bic, 1e-4, "BIC");
        assert_eq!(weighted, fit(&phi, Some(&w), 3));
    }

    #[test]
    fn equal_axes_stay_within_the_caps() {
        let models = mixtures(&[1.0; 30], None, SETTINGS, Seed(1), &Work::quiet()).expect("nobody stops");
        assert!(models.iter().flat_map(|m| &m.components).all(|c| c.kappa <= MOST_KAPPA && c.weight > 0.0));
        assert_eq!(models[0].components.len(), 1);
        assert!(mixtures(&[], None, SETTINGS, Seed(1), &Work::quiet()).expect("nobody stops").is_empty());
    }
}
