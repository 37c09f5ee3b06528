//! Two samples of axes that are not independent: do they differ, by how much, and is that more than chance?

use crate::ground::{Axis, Method, Seed, Stopped, Symbol, Work};
use crate::numeric::bessel::inverse_ratio;
use crate::numeric::tail::f_above;

use super::effective::{EffectiveNumber, Number, effective_number, independent};
use super::equal_kappa::equal_kappa_of;
use super::exchanged;
use super::mardia_watson_wheeler::{self, Form, mardia_watson_wheeler};
use super::mean::{Resultant, doubled};
use super::paired::{self, paired};
use super::rank;
use super::sources::DERIVED;
use super::summary::{AxialSample, Summary, SummarySettings, summarise};
use super::wallraff::{self, wallraff};
use super::watson::tail;
use super::watson_two::{self, watson_two};
use super::watson_williams::{self, KappaFrom, watson_williams_of};

pub static METHOD: Method = Method {
    id: "axial.two-samples",
    name: "Two samples of correlated axes",
    question: "Do the axes of two fields differ by more than chance?",
    formula: "U²* = U² (N₁N₂/N)/(n₁n₂/n), likewise W and H;  F with Rᵢ = Nᵢ R̄ᵢ and N − 2 or ν₁ + ν₂ − 2 degrees of freedom, the fewer;  interval: d ± √(h₁² + h₂²)",
    symbols: &[
        Symbol { symbol: "n₁, n₂", meaning: "nodes of each sample; n their sum", unit: "1" },
        Symbol {
            symbol: "N₁, N₂",
            meaning: "independent axes they are worth, taken from the very numbers each test sums: circular ranks for U² and W, ranks of distance for H, sines for F",
            unit: "1",
        },
        Symbol { symbol: "νᵢ", meaning: "degrees of freedom with which Nᵢ is known", unit: "1" },
        Symbol {
            symbol: "d, hᵢ",
            meaning: "second mean less the first; half the interval of each",
            unit: "deg",
        },
    ],
    assumptions: &[
        "Each field is statistically the same all over its ground.",
        "The two are independent: for the same ground seen twice the paired difference is the sharper test, and these are too cautious.",
    ],
    limits: &[
        "U², W and H are squared distances between the samples, so that nodes worth fewer axes make them too large by n over N.",
        "Where both fields hold ten tiles of four correlation lengths, p of U², W and H is the share of random exchanges of tiles between them that makes as great a difference; the tables at N find half as many or fewer at 5 %.",
        "At 5 %, F and the paired difference found a difference in 2 to 7 % of simulated fields of one law, 15 to 40 correlation lengths wide.",
    ],
    sources: &[DERIVED],
};

/// Two samples of axes held against each other. Angles in degrees, axial.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct AxesCompared {
    /// Axes, and independent axes they are worth.
    pub n: [usize; 2],
    pub n_eff: [f64; 2],
    pub means: [Option<Axis>; 2],
    /// Second mean less the first, in (−90, 90], with its 95 % interval; `None` without two means. Of samples
    /// paired place by place it is the mean of the differences.
    pub difference_deg: Option<f64>,
    pub difference_ci95_deg: Option<[f64; 2]>,
    /// Places where both have an axis, and what they are worth for the mean of the differences; `None` where the
    /// two were not paired.
    pub pairs: Option<(usize, f64)>,
    /// Each test that applies, the advised one first.
    pub tests: Vec<AxesTest>,
    /// Whether the advised test says that the two differ at the level asked for.
    pub differ: bool,
}

/// One test of two samples.
#[derive(Clone, Debug, PartialEq)]
pub struct AxesTest {
    /// Of its method record.
    pub method: &'static str,
    pub name: &'static str,
    pub statistic: f64,
    /// At the effective numbers.
    pub p: f64,
    /// Why it is advised, or what stands against it here.
    pub remark: String,
}

/// What a comparison needs to know besides the axes.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct TwoSampleSettings {
    /// Level of the tests.
    pub significance: f64,
    /// Draws of the block bootstrap of each interval.
    pub resamples: u32,
    /// Random rearrangements of tiles, for the paired test and those on ranks.
    pub permutations: u32,
}

/// The same place in both samples: indices into the first and the second.
pub type Pair = [usize; 2];

/// κ from which the Watson–Williams test holds.
const LEAST_KAPPA: f64 = 2.0;
/// Equal concentration is doubted below this p.
const UNEQUAL: f64 = 0.05;
/// Fewer independent axes than this in one sample are no sample.
const LEAST: f64 = 5.0;
/// The paired mean is advised where this share of the smaller sample has a partner, …
const MOSTLY_PAIRED: f64 = 0.8;
/// … and the differences agree so far that they have a mean.
const LEAST_AGREEMENT: f64 = 0.5;

/// Compares the second sample with the first. `pairs` names the places both show; empty for different ground.
///
/// Fewer than two axes on one side leave everything empty.
///
/// # Errors
/// [`Stopped`].
pub fn compare(
    first: &AxialSample,
    second: &AxialSample,
    pairs: &[Pair],
    settings: TwoSampleSettings,
    seed: Seed,
    work: &Work,
) -> Result<AxesCompared, Stopped> {
    let samples = [first, second];
    let phi = samples.map(|s| doubled(s.axes));
    if phi.iter().any(|p| p.len() < 2) {
        return Ok(AxesCompared { n: phi.map(|p| p.len()), ..Default::default() });
    }
    let s = SummarySettings { significance: settings.significance, resamples: settings.resamples };
    let summaries = [summarise(first, s, seed, work)?, summarise(second, s, seed, work)?];
    let means = [0, 1].map(|i| summaries[i].mean.filter(|_| summaries[i].interval.half_deg.is_some()));
    let mut compared = AxesCompared {
        n: [phi[0].len(), phi[1].len()],
        n_eff: [summaries[0].n_eff_mean, summaries[1].n_eff_mean],
        means,
        ..Default::default()
    };
    if let ([Some(a), Some(b)], [Some(h), Some(k)]) =
        (means, [0, 1].map(|i: usize| summaries[i].interval.half_deg))
    {
        let d = turn(a, b);
        compared.difference_deg = Some(d);
        compared.difference_ci95_deg = Some([d - h.hypot(k), d + h.hypot(k)]);
    }
    compared.tests = tests(samples, &phi, &summaries, settings.permutations, seed, work)?;
    if pairs.len() >= 2 {
        let by_pair = paired(first, second, pairs, settings, seed, work)?;
        compared.pairs = Some((by_pair.n, by_pair.n_eff));
        let share = by_pair.n as f64 / phi[0].len().min(phi[1].len()) as f64;
        let agree = by_pair.resultant_length >= LEAST_AGREEMENT;
        let advised = share >= MOSTLY_PAIRED && agree;
        let remark = match (share >= MOSTLY_PAIRED, agree) {
            (true, true) => {
                "advised: the same ground place by place, so that its own variety drops out".into()
            }
            (true, false) => {
                "not advised: from place to place the differences agree too little to have a mean".into()
            }
            (false, _) => format!("only {:.0} % of the places are shown by both", 100.0 * share),
        };
        let test = AxesTest {
            method: paired::METHOD.id,
            name: "paired difference",
            statistic: by_pair.t,
            p: by_pair.p,
            remark,
        };
        if advised {
            compared.difference_deg = Some(by_pair.difference_deg);
            compared.difference_ci95_deg =
                by_pair.half_deg.map(|h| [by_pair.difference_deg - h, by_pair.difference_deg + h]);
        }
        if let Some(was) = compared.tests.first_mut().filter(|_| advised) {
            was.remark = format!("for different ground: {}", was.remark.trim_start_matches("advised: "));
        }
        compared.tests.insert(if advised { 0 } else { compared.tests.len() }, test);
    }
    compared.differ = compared.tests.first().is_some_and(|t| t.p <= settings.significance);
    Ok(compared)
}

/// The turn from `a` to `b` in (−90, 90].
pub(super) fn turn(a: Axis, b: Axis) -> f64 {
    let turn = b.turn_from(a);
    if turn <= -90.0 { 90.0 } else { turn }
}

/// The tests for two fields of different ground, the advised one first.
fn tests(
    samples: [&AxialSample; 2],
    phi: &[Vec<f64>; 2],
    summaries: &[Summary; 2],
    permutations: u32,
    seed: Seed,
    work: &Work,
) -> Result<Vec<AxesTest>, Stopped> {
    let number = |i: usize, values: &[f64]| worth(samples[i], values, work);
    let of_mean = [number(0, &phi[0])?.mean, number(1, &phi[1])?.mean];
    if of_mean.iter().any(|n| n.value() < LEAST) {
        return Ok(Vec::new());
    }
    let [r, s] = [0, 1].map(|i| Resultant::of(&phi[i], samples[i].weights));
    let scaled = [scaled(r, of_mean[0].value()), scaled(s, of_mean[1].value())];
    let williams = watson_williams_of(&scaled, KappaFrom::Within);
    let df = of_mean[0].df + of_mean[1].df - 2.0;
    let df = if df.is_nan() { williams.df[1] } else { df.clamp(1.0, williams.df[1].max(1.0)) };
    let p_williams = f_above(williams.f, 1.0, df);
    let equal = equal_kappa_of(&scaled).1;
    let kappa = [r, s].map(|r| inverse_ratio(r.mean_length()));
    let holds = kappa.iter().all(|k| *k >= LEAST_KAPPA) && (equal.is_nan() || equal >= UNEQUAL);

    // U² and W rest on the circular ranks of both samples together, H on ranks of the distance from the mean.
    let ranks = rank::circular([&phi[0], &phi[1]]);
    let of_ranks = [number(0, &ranks[0])?.test, number(1, &ranks[1])?.test];
    let share = share_of(&of_ranks, phi);
    let u2 = share * watson_two(&phi[0], &phi[1]).0;
    let w = share * mardia_watson_wheeler(&[&phi[0], &phi[1]], Form::TwoSample, seed).0;
    let distances = rank::of_distance([&phi[0], &phi[1]]);
    let of_distances = [number(0, &distances[0])?.mean, number(1, &distances[1])?.mean];
    let h = share_of(&of_distances, phi) * wallraff(&[&phi[0], &phi[1]]).0;
    // Their tables are those of squares of normal numbers; N known from few discs widens these.
    let df_ranks = of_ranks[0].df + of_ranks[1].df - 2.0;
    let df_distances = of_distances[0].df + of_distances[1].df - 2.0;
    let widened = |x: f64, df1: f64, df2: f64| {
        f_above(x / df1, df1, if df2.is_nan() { f64::INFINITY } else { df2.max(1.0) })
    };
    let mut p_u2 = tail(u2).max(0.0);
    let mut p_w = widened(w, 2.0, df_ranks);
    let mut p_h = widened(h, 1.0, df_distances);
    let blocks = [0, 1].map(|i: usize| summaries[i].interval.blocks);
    if let ([Some(a), Some(b)], [Some(m), Some(n)]) = (blocks, samples.map(|s| s.nodes))
        && permutations > 0
    {
        let field = |i: usize, at| exchanged::Field { ranks: &ranks[i], distances: &distances[i], at };
        let fields = [field(0, m.at), field(1, n.at)];
        [p_u2, p_w, p_h] = exchanged::p_values(fields, a.side.max(b.side), permutations, seed, work)?;
    }

    let [k1, k2] = kappa;
    let conditions = if holds {
        format!(
            "both concentrated (κ {k1:.1} and {k2:.1}, at least {LEAST_KAPPA:.0}) and alike in that (p = {equal:.2})"
        )
    } else if equal < UNEQUAL {
        format!("it wants equal concentration, but κ is {k1:.1} and {k2:.1} (p = {equal:.3})")
    } else {
        format!("it wants κ of {LEAST_KAPPA:.0} or more, but κ is {k1:.1} and {k2:.1}")
    };
    let says = |advised: bool, text: &str| if advised { format!("advised: {text}") } else { text.to_owned() };
    let mut tests = vec![
        AxesTest {
            method: watson_williams::METHOD.id,
            name: "Watson–Williams",
            statistic: williams.f,
            p: p_williams,
            remark: says(holds, &conditions),
        },
        AxesTest {
            method: watson_two::METHOD.id,
            name: "Watson’s U²",
            statistic: u2,
            p: p_u2,
            remark: says(!holds, "any difference of the two distributions, of mean, spread or shape"),
        },
    ];
    if !holds {
        tests.swap(0, 1);
    }
    tests.push(AxesTest {
        method: mardia_watson_wheeler::METHOD.id,
        name: "Mardia–Watson–Wheeler",
        statistic: w,
        p: p_w,
        remark: "by ranks alone, in the two-sample form".into(),
    });
    tests.push(AxesTest {
        method: wallraff::METHOD.id,
        name: "Wallraff",
        statistic: h,
        p: p_h,
        remark: format!(
            "of spread only: {:.1}° and {:.1}°",
            summaries[0].spread_deg.unwrap_or(f64::NAN),
            summaries[1].spread_deg.unwrap_or(f64::NAN)
        ),
    });
    Ok(tests)
}

/// What nodes are worth when `values`, circle angles, stand at them.
fn worth(sample: &AxialSample, values: &[f64], work: &Work) -> Result<EffectiveNumber, Stopped> {
    match sample.nodes {
        Some(n) => effective_number(values, sample.weights, n.at, n.spacing, n.kernel_sigma, work),
        None => Ok(independent(values.len() as f64)),
    }
}

/// (N₁N₂/N)/(n₁n₂/n).
fn share_of(worth: &[Number; 2], phi: &[Vec<f64>; 2]) -> f64 {
    let harmonic = |a: f64, b: f64| a * b / (a + b);
    harmonic(worth[0].value(), worth[1].value()) / harmonic(phi[0].len() as f64, phi[1].len() as f64)
}

/// A resultant as of `n` independent axes.
fn scaled(r: Resultant, n: f64) -> Resultant {
    let by = if r.weight > 0.0 { n / r.weight } else { 0.0 };
    Resultant { cos: by * r.cos, sin: by * r.sin, weight: by * r.weight }
}
