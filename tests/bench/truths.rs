//! Fields grown under winds that are known: a climate, a theory that is true in it, crests with errors, and a
//! record of one year by which they are judged.

use rand::Rng as _;
use rand_distr::{Distribution as _, Normal, StandardNormal};
use ventifact::ground::{Axis, Azimuth, Body, Seed, WindRecord, WindSample, Work};
use ventifact::numeric::bessel;
use ventifact::science::alignment::obliquity::class;
use ventifact::science::alignment::{
    FluxUp, Judgement, Theory, TrendEvidence, VerdictSettings, foresee, judge,
};
use ventifact::science::axial::{self, AxialSample, SummarySettings};
use ventifact::science::wind::{Site, WindSettings, assess};

/// Theories that may be true.
pub const TRUTHS: [Theory; 5] =
    [Theory::Transverse, Theory::Along, Theory::GrossNormal, Theory::BedInstability, Theory::Fingering];
const MODEL_ERROR: f64 = 5.0;
const FLUX_UP: FluxUp = FluxUp { ratio: 1.6, doubt: 1.25 };

/// One field and its verdict.
pub struct Field {
    pub truth: Theory,
    pub true_class: &'static str,
    pub verdict: Judgement,
}

impl Field {
    /// The theory with the greatest marginal likelihood.
    pub fn leader(&self) -> Theory {
        let weighed = self.verdict.theories.iter().filter(|t| t.prior > 0.0);
        let best = weighed.filter_map(|t| Some((t.theory?, t.ln_bayes_factor)));
        best.max_by(|a, b| a.1.total_cmp(&b.1)).map_or(self.truth, |(theory, _)| theory)
    }

    fn axis(&self, theory: Theory) -> Option<Axis> {
        self.verdict.theories.iter().find(|t| t.theory == Some(theory)).and_then(|t| t.axis())
    }

    /// How far the prediction of `theory` lies from that of the true one, degrees.
    pub fn apart(&self, theory: Theory) -> f64 {
        self.axis(theory).zip(self.axis(self.truth)).map_or(90.0, |(a, b)| a.separation(b))
    }

    /// Whether every other theory predicts something more than 20° away.
    pub fn stands_alone(&self) -> bool {
        TRUTHS.into_iter().filter(|t| *t != self.truth).all(|t| self.apart(t) > 20.0)
    }
}

/// Two seasons of random winds.
struct Climate {
    toward: [f64; 2],
    speed: [f64; 2],
    gusts: [f64; 2],
    swing: f64,
    /// Share of the year of the first.
    share: f64,
}

impl Climate {
    fn random(stream: &mut impl rand::Rng) -> Self {
        let first = 360.0 * stream.random::<f64>();
        let divergence = 20.0 + 150.0 * stream.random::<f64>();
        let mut between = |low: f64, high: f64| low + (high - low) * stream.random::<f64>();
        Self {
            toward: [first, first + divergence],
            speed: [between(5.0, 9.0), between(5.0, 9.0)],
            gusts: [between(1.5, 3.0), between(1.5, 3.0)],
            swing: between(8.0, 20.0),
            share: between(0.3, 0.7),
        }
    }

    /// Hourly weather of `years`: first-order noise in speed and direction, e-folding 20 h.
    fn record(&self, years: usize, stream: &mut impl rand::Rng) -> WindRecord {
        let keep = (-1.0f64 / 20.0).exp();
        let fresh = (1.0 - keep * keep).sqrt();
        let (mut strength, mut turn) = (0.0f64, 0.0f64);
        let samples = (0..years * 8760)
            .map(|hour| {
                let mut normal = || -> f64 { StandardNormal.sample(stream) };
                strength = keep * strength + fresh * normal();
                turn = keep * turn + fresh * normal();
                let season = usize::from((hour % 8760) as f64 / 8760.0 >= self.share);
                let from = Azimuth::from_deg(self.toward[season] + 180.0 + self.swing * turn);
                WindSample {
                    line: hour as u32 + 1,
                    time: Some(3600 * hour as i64),
                    speed: Some((self.speed[season] + self.gusts[season] * strength).max(0.0)),
                    from: Some(from),
                    weight: 1.0,
                }
            })
            .collect();
        WindRecord { samples, is_table: false, gusts: Vec::new() }
    }
}

/// Grows field `index` and judges it; `None` when its winds move no sand or prefer no trend.
pub fn field(index: u64) -> Option<Field> {
    let seed = Seed(20_260).child(&format!("field {index}"));
    let mut stream = seed.stream("truth", 0);
    let climate = Climate::random(&mut stream);
    let earth = Body::earth();
    let site =
        Site { height_m: 10.0, roughness_m: 1e-3, air: earth.air, gravity: earth.gravity, is_earth: true };
    let settings = WindSettings { resamples: 240, ..WindSettings::default() };

    // What the ground has felt: five other years, by a mill drawn from the doubt.
    let felt = climate.record(5, &mut stream);
    let felt = assess(&felt, &site, &WindSettings { resamples: 0, ..settings }, seed, &Work::quiet()).ok()?;
    let mill = felt.replay.mill().drawn(&settings.doubt, seed, stream.random_range(0..10_000));
    let regime = felt.replay.regime(mill.assumption());
    let truth = TRUTHS[stream.random_range(0..TRUTHS.len())];
    let flux_up = FLUX_UP.ratio * FLUX_UP.doubt.powf(2.0 * stream.random::<f64>() - 1.0);
    let predicted = truth.predict(&regime, flux_up)?.main().axis;
    let missed = Normal::new(0.0, MODEL_ERROR).ok()?.sample(&mut stream);
    let trend = predicted.rotated(missed);
    let drift = Theory::Along.predict(&regime, flux_up)?.main().axis;

    // The crests: independent axes with a spread of 8 to 20° about the trend.
    let spread = 8.0 + 12.0 * stream.random::<f64>();
    let count = stream.random_range(30..200);
    let noise = Normal::new(0.0, spread).ok()?;
    let axes: Vec<Axis> = (0..count).map(|_| trend.rotated(noise.sample(&mut stream))).collect();
    let sample = AxialSample { axes: &axes, weights: None, nodes: None };
    let settled = SummarySettings { significance: 0.05, resamples: 500 };
    let summary = axial::summarise(&sample, settled, seed, &Work::quiet()).ok()?;
    let evidence = TrendEvidence {
        axis: summary.mean?,
        kappa_mean: summary.n_eff_mean * summary.kappa * bessel::ratio(summary.kappa),
        half_ci: summary.interval.half_deg?,
    };

    // One year of it on record, judged by the stated laws.
    let record = climate.record(1, &mut stream);
    let known = assess(&record, &site, &settings, seed, &Work::quiet()).ok()?;
    let foresight = foresee(&known.regime, &known.draws, FLUX_UP, seed, &Work::quiet()).ok()?;
    let priors = Theory::ALL.iter().map(|t| if TRUTHS.contains(t) { 1.0 } else { 0.0 }).chain([0.05]);
    let verdict_settings = VerdictSettings {
        model_error_deg: MODEL_ERROR,
        priors: priors.collect(),
        ..VerdictSettings::default()
    };
    let verdict = judge(&evidence, &foresight, None, &verdict_settings).ok()?;
    let true_class = class(trend.separation(drift));
    Some(Field { truth, true_class, verdict })
}

/// A row of a reliability table: forecasts in a bin, their mean, and how often they came true.
pub struct Bin {
    pub count: usize,
    pub forecast: f64,
    pub observed: f64,
}

/// Sorts forecasts into bins of equal width.
pub fn reliability(forecasts: &[(f64, bool)], bins: usize) -> Vec<Bin> {
    (0..bins)
        .map(|bin| {
            let inside: Vec<&(f64, bool)> =
                forecasts.iter().filter(|(p, _)| ((p * bins as f64) as usize).min(bins - 1) == bin).collect();
            let n = inside.len().max(1) as f64;
            Bin {
                count: inside.len(),
                forecast: inside.iter().map(|(p, _)| p).sum::<f64>() / n,
                observed: inside.iter().filter(|(_, came)| *came).count() as f64 / n,
            }
        })
        .collect()
}

/// The forecasts of class by all fields: probability, and whether that class was true.
pub fn class_forecasts(fields: &[Field]) -> Vec<(f64, bool)> {
    let names = ["longitudinal", "oblique", "transverse"];
    let of = |field: &Field| {
        let shares = field.verdict.probabilities.unwrap_or_default();
        let came = field.true_class;
        names.into_iter().zip(shares).map(move |(name, p)| (p, name == came)).collect::<Vec<_>>()
    };
    fields.iter().flat_map(of).collect()
}
