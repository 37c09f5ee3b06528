//! Two samples of axes that are not independent: do they differ, by how much, and is that more than chance?

use crate::ground::Axis;

/// Two samples of axes held against each other. Angles in degrees, axial.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct AxesCompared {
    /// Axes, and independent axes they are worth.
    pub n: [usize; 2],
    pub n_eff: [f64; 2],
    pub means: [Option<Axis>; 2],
    /// Second mean less the first, in (−90, 90], with its 95 % interval; `None` without two means.
    pub difference_deg: Option<f64>,
    pub difference_ci95_deg: Option<[f64; 2]>,
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
