//! The obstacle test of one outcrop: obliquity, radius, dipole, virtual outcrops, and whether that is a decision.

use crate::ground::{Seed, Stopped, Work};
use crate::numeric::tail::f_above;

use super::dipole::{Dipole, dipole};
use super::field::Field;
use super::null::{Null, Placing, null};
use super::obliquity::{
    Annulus, AtRadius, Estimate, Obliquity, WIDEST_HALF_DEG, best_radius, estimate, over_radius,
};
use super::outline::Ellipse;

/// What the user may turn.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct TestSettings {
    pub annulus: Annulus,
    /// Virtual outcrops; 0 for none.
    pub virtual_count: usize,
    /// The ground may be looked at from any side (see [`Placing`]).
    pub homogeneous: bool,
    /// Amplitude below which nothing is decided.
    pub least_amplitude: f64,
}

/// What one outcrop says.
#[derive(Clone, Debug, PartialEq)]
pub struct Outcome {
    pub estimate: Estimate,
    pub obliquity: Obliquity,
    /// Why the obliquity is no decision, in words; `None` when it is one.
    pub undecided: Option<String>,
    /// p of amplitude 0 by the estimate's own error (F with 2 degrees of freedom).
    pub pattern_p: f64,
    pub over_radius: Vec<AtRadius>,
    /// The radius that fits best as a share of the stated one, where the data tell.
    pub best_radius: Option<f64>,
    pub dipole: Option<Dipole>,
    pub null: Option<Null>,
}

/// Tests `outcrops[which]`; `step` is the distance of neighbouring nodes. `None` when too few nodes stand
/// round it.
///
/// # Errors
/// [`Stopped`].
pub fn test(
    field: &Field,
    outcrops: &[Ellipse],
    which: usize,
    settings: &TestSettings,
    step: f64,
    seed: Seed,
    work: &Work,
) -> Result<Option<Outcome>, Stopped> {
    let (outcrop, annulus) = (&outcrops[which], &settings.annulus);
    work.advance(0)?;
    let Some(estimate) = estimate(field, outcrop, annulus) else { return Ok(None) };
    let obliquity = estimate.obliquity(field.crest_se_deg);
    let over_radius = over_radius(field, outcrop, annulus);
    let best_radius = best_radius(&over_radius, estimate.n_eff);
    let dipole = dipole(field, outcrop, annulus);
    let null = if settings.virtual_count == 0 {
        None
    } else {
        let placing = Placing { count: settings.virtual_count, homogeneous: settings.homogeneous };
        let observed = (obliquity.amplitude, dipole.map(|d| d.size));
        Some(null(field, outcrops, which, annulus, placing, step, observed, seed, work)?)
    };
    let undecided = undecided(&obliquity, settings.least_amplitude);
    let pattern_p = pattern_p(&estimate);
    Ok(Some(Outcome { estimate, obliquity, undecided, pattern_p, over_radius, best_radius, dipole, null }))
}

/// Why an obliquity is no decision.
pub fn undecided(obliquity: &Obliquity, least_amplitude: f64) -> Option<String> {
    if obliquity.amplitude < least_amplitude {
        return Some(format!(
            "the crests turn too little (amplitude {:.2}, needed {least_amplitude})",
            obliquity.amplitude
        ));
    }
    match obliquity.half_deg {
        None => Some("the scatter allows every obliquity".into()),
        Some(half) if half > WIDEST_HALF_DEG => {
            Some(format!("the interval of ± {half:.0}° is wider than ± {WIDEST_HALF_DEG:.0}°"))
        }
        Some(_) => None,
    }
}

/// P(F > bᵀ Cov⁻¹ b/2) with 2 and the estimate's degrees of freedom.
fn pattern_p(e: &Estimate) -> f64 {
    let (ss, cc, sc) = (e.se_s * e.se_s, e.se_c * e.se_c, e.covariance);
    let determinant = ss * cc - sc * sc;
    if determinant.is_nan() || determinant <= 0.0 {
        return 1.0;
    }
    let square = (cc * e.b_s * e.b_s - 2.0 * sc * e.b_s * e.b_c + ss * e.b_c * e.b_c) / determinant;
    f_above(0.5 * square, 2.0, e.df)
}
