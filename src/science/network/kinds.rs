//! Moments of the pattern features over simulated networks of each kind, and the probabilities they give.

/// Mean and covariance of the coordinates of a kind.
struct Kind {
    mean: [f64; N],
    covariance: [[f64; N]; N],
}

const N: usize = 6;

/// Standard deviations by which real networks of a kind may differ from the simulated ones beside chance: a judgement,
/// so that no kind is ruled out by a feature the simulation holds too tightly.
const MODEL_SD: [f64; N] = [0.1, 0.1, 0.1, 0.1, 0.3, 0.2];

/// Power of the likelihoods: real networks differ more than simulated ones.
const TEMPER: f64 = 0.5;

/// By `cargo bench --bench patterns`: 300 draws of each kind in the order of `PATTERN_NAMES`, chords of 8 cells,
/// centre found.
const KINDS: [Kind; 5] = [
    // Dendritic.
    Kind {
        mean: [0.3860, 0.1234, 0.4371, 0.0774, -0.8180, -0.4707],
        covariance: [
            [0.020456, 0.003738, -0.007391, -0.004845, -0.023348, 0.021170],
            [0.003738, 0.005007, -0.001413, -0.000977, -0.002910, 0.002254],
            [-0.007391, -0.001413, 0.008936, 0.004807, 0.005481, -0.003055],
            [-0.004845, -0.000977, 0.004807, 0.005617, 0.004684, -0.002730],
            [-0.023348, -0.002910, 0.005481, 0.004684, 0.085238, -0.033198],
            [0.021170, 0.002254, -0.003055, -0.002730, -0.033198, 0.132359],
        ],
    },
    // Parallel.
    Kind {
        mean: [0.7751, 0.4407, 0.2443, 0.0067, -1.6232, 0.6718],
        covariance: [
            [0.010095, 0.018383, -0.006358, -0.000838, -0.040618, 0.007639],
            [0.018383, 0.037567, -0.011535, -0.001283, -0.076024, 0.011492],
            [-0.006358, -0.011535, 0.007385, 0.001144, 0.025080, -0.005965],
            [-0.000838, -0.001283, 0.001144, 0.000692, 0.002043, -0.000885],
            [-0.040618, -0.076024, 0.025080, 0.002043, 0.331768, -0.039776],
            [0.007639, 0.011492, -0.005965, -0.000885, -0.039776, 0.025506],
        ],
    },
    // Trellis.
    Kind {
        mean: [0.3915, 0.6711, 1.1514, 0.3718, -1.0293, -0.2914],
        covariance: [
            [0.027127, 0.011926, 0.006368, -0.004290, -0.019942, -0.003907],
            [0.011926, 0.011424, 0.003591, 0.002766, -0.011540, -0.001979],
            [0.006368, 0.003591, 0.019086, -0.001936, -0.019296, -0.000321],
            [-0.004290, 0.002766, -0.001936, 0.019229, 0.001777, 0.000049],
            [-0.019942, -0.011540, -0.019296, 0.001777, 0.304698, 0.004121],
            [-0.003907, -0.001979, -0.000321, 0.000049, 0.004121, 0.014467],
        ],
    },
    // Rectangular.
    Kind {
        mean: [0.1863, 0.6123, 0.9523, 0.7168, -0.8964, -0.3393],
        covariance: [
            [0.020377, 0.003250, -0.005759, -0.009889, -0.033544, 0.007960],
            [0.003250, 0.007799, 0.000787, 0.003590, -0.004511, -0.001435],
            [-0.005759, 0.000787, 0.010949, 0.009778, 0.008757, -0.000315],
            [-0.009889, 0.003590, 0.009778, 0.029814, 0.012595, -0.004686],
            [-0.033544, -0.004511, 0.008757, 0.012595, 0.132166, -0.024902],
            [0.007960, -0.001435, -0.000315, -0.004686, -0.024902, 0.039723],
        ],
    },
    // Radial.
    Kind {
        mean: [0.0404, 0.1514, 0.1987, 0.0027, -0.1273, 0.9571],
        covariance: [
            [0.000561, -0.000057, 0.000102, 0.000040, -0.000384, 0.000034],
            [-0.000057, 0.002698, 0.000566, -0.000065, -0.000386, -0.000183],
            [0.000102, 0.000566, 0.010700, 0.000582, -0.002402, -0.001411],
            [0.000040, -0.000065, 0.000582, 0.000371, -0.000265, -0.000091],
            [-0.000384, -0.000386, -0.002402, -0.000265, 0.023228, 0.000927],
            [0.000034, -0.000183, -0.001411, -0.000091, 0.000927, 0.000485],
        ],
    },
];

/// The probability of each kind, all as likely beforehand; an unknown coordinate is left out.
pub(super) fn probabilities(coordinates: &[Option<f64>; N]) -> [f64; 5] {
    let logs = KINDS.each_ref().map(|kind| TEMPER * kind.log_likelihood(coordinates));
    let top = logs.iter().copied().fold(f64::NEG_INFINITY, f64::max);
    let parts = logs.map(|l| (l - top).exp());
    let all: f64 = parts.iter().sum();
    parts.map(|p| p / all)
}

impl Kind {
    /// −½ (ln |Σ| + dᵀ Σ⁻¹ d), by the Cholesky factor of Σ; a missing coordinate has d = 0 and its own unit row.
    fn log_likelihood(&self, coordinates: &[Option<f64>; N]) -> f64 {
        let known = |i: usize| coordinates[i].is_some();
        let sigma = |i: usize, j: usize| match (known(i) && known(j), i == j) {
            (true, true) => self.covariance[i][j] + MODEL_SD[i] * MODEL_SD[i],
            (true, false) => self.covariance[i][j],
            (false, same) => f64::from(u8::from(same)),
        };
        let mut factor = [[0.0; N]; N];
        let mut solved = [0.0; N];
        let mut log = 0.0;
        for i in 0..N {
            for j in 0..=i {
                let dot: f64 = (0..j).map(|k| factor[i][k] * factor[j][k]).sum();
                let rest = sigma(i, j) - dot;
                factor[i][j] = if i == j { rest.max(1e-12).sqrt() } else { rest / factor[j][j] };
            }
            let d = coordinates[i].map_or(0.0, |c| c - self.mean[i]);
            let dot: f64 = (0..i).map(|k| factor[i][k] * solved[k]).sum();
            solved[i] = (d - dot) / factor[i][i];
            log -= factor[i][i].ln() + 0.5 * solved[i] * solved[i];
        }
        log
    }
}
