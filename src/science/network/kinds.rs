//! Moments of the pattern features over simulated networks of each kind, and the probabilities they give.

/// Mean and covariance of the coordinates of a kind.
struct Kind {
    mean: [f64; N],
    covariance: [[f64; N]; N],
}

const N: usize = 6;

/// Power of the likelihoods: real networks differ more than simulated ones.
const TEMPER: f64 = 0.5;

/// By `cargo bench --bench patterns`: 300 draws of each kind in the order of `PATTERN_NAMES`, chords of 8 cells,
/// centre found.
const KINDS: [Kind; 5] = [
    // Dendritic.
    Kind {
        mean: [0.2806, 0.1111, 0.4651, 0.0987, -0.7033, -0.6762],
        covariance: [
            [0.007776, 0.000410, -0.003872, -0.002499, -0.004274, -0.004047],
            [0.000410, 0.003050, 0.000076, -0.000373, 0.000059, -0.000623],
            [-0.003872, 0.000076, 0.008726, 0.005345, -0.000992, 0.004498],
            [-0.002499, -0.000373, 0.005345, 0.007090, -0.001239, 0.002485],
            [-0.004274, 0.000059, -0.000992, -0.001239, 0.051266, -0.005448],
            [-0.004047, -0.000623, 0.004498, 0.002485, -0.005448, 0.008481],
        ],
    },
    // Parallel.
    Kind {
        mean: [0.8542, 0.5892, 0.1976, 0.0010, -1.9357, 0.6820],
        covariance: [
            [0.004609, 0.011191, -0.003627, -0.000088, -0.027808, 0.005857],
            [0.011191, 0.028767, -0.009029, -0.000179, -0.067489, 0.011797],
            [-0.003627, -0.009029, 0.004443, 0.000065, 0.022054, -0.004512],
            [-0.000088, -0.000179, 0.000065, 0.000040, 0.000334, -0.000124],
            [-0.027808, -0.067489, 0.022054, 0.000334, 0.316151, -0.041136],
            [0.005857, 0.011797, -0.004512, -0.000124, -0.041136, 0.024607],
        ],
    },
    // Trellis.
    Kind {
        mean: [0.4353, 0.7110, 1.1825, 0.3853, -1.0906, -0.3212],
        covariance: [
            [0.028539, 0.011507, 0.004371, -0.005494, -0.025043, -0.003826],
            [0.011507, 0.009982, 0.002695, 0.001998, -0.009529, -0.002001],
            [0.004371, 0.002695, 0.014650, -0.002334, -0.020358, 0.000132],
            [-0.005494, 0.001998, -0.002334, 0.020628, 0.006904, -0.001028],
            [-0.025043, -0.009529, -0.020358, 0.006904, 0.451925, 0.002395],
            [-0.003826, -0.002001, 0.000132, -0.001028, 0.002395, 0.010722],
        ],
    },
    // Rectangular.
    Kind {
        mean: [0.1379, 0.6126, 0.9620, 0.7410, -0.7670, -0.4550],
        covariance: [
            [0.009803, 0.001146, -0.003464, -0.002847, -0.015058, -0.002400],
            [0.001146, 0.006626, 0.001524, 0.003038, 0.000405, -0.000533],
            [-0.003464, 0.001524, 0.008694, 0.006184, 0.007687, 0.002303],
            [-0.002847, 0.003038, 0.006184, 0.018773, 0.003225, 0.001426],
            [-0.015058, 0.000405, 0.007687, 0.003225, 0.100594, 0.000237],
            [-0.002400, -0.000533, 0.002303, 0.001426, 0.000237, 0.007375],
        ],
    },
    // Radial.
    Kind {
        mean: [0.0401, 0.1377, 0.1508, 0.0004, -0.1224, 0.9701],
        covariance: [
            [0.000591, 0.000012, -0.000080, 0.000015, -0.000329, 0.000010],
            [0.000012, 0.002570, 0.001379, 0.000025, 0.000014, -0.000270],
            [-0.000080, 0.001379, 0.007366, 0.000090, -0.002184, -0.000712],
            [0.000015, 0.000025, 0.000090, 0.000038, -0.000103, -0.000013],
            [-0.000329, 0.000014, -0.002184, -0.000103, 0.023274, 0.000529],
            [0.000010, -0.000270, -0.000712, -0.000013, 0.000529, 0.000173],
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
            (true, _) => self.covariance[i][j],
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
