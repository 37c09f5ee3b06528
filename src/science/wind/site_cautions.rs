//! What the height of the anemometer and the averaging time leave uncertain.

use crate::ground::Caution;

use super::log_law::friction_ratio;
use super::settings::Site;

/// Heights between which the choice of roughness and stability matters little, m: half and twice the
/// standard ten.
const STANDARD_M: [f64; 2] = [5.0, 20.0];
/// Shortest averaging time the laws were fitted to, s.
const SHORTEST_MEAN_S: f64 = 300.0;
/// By how much the roughness is tried wrong.
const ROUGHNESS_FACTOR: f64 = 10.0;

/// Cautions on height, stability and averaging time.
pub(super) fn of(site: &Site, interval_s: Option<f64>) -> Vec<Caution> {
    let mut cautions = Vec::new();
    let Site { height_m, roughness_m, .. } = *site;
    if !(STANDARD_M[0]..=STANDARD_M[1]).contains(&height_m) {
        let own = friction_ratio(height_m, roughness_m);
        let rougher = ROUGHNESS_FACTOR * roughness_m;
        let other =
            if height_m > 2.0 * rougher { friction_ratio(height_m, rougher) / own } else { f64::INFINITY };
        cautions.push(Caution::new(
            "height",
            format!(
                "The wind was read at {height_m} m and is brought to the sand by the logarithmic law, which holds for \
                 neutral air only: by day and by night the profile differs, and a roughness {ROUGHNESS_FACTOR:.0} times \
                 larger would change the friction velocity by a factor of {other:.2}."
            ),
        ));
    }
    if let Some(step) = interval_s.filter(|s| *s < SHORTEST_MEAN_S) {
        cautions.push(Caution::new(
            "short-means",
            format!(
                "A row every {step:.0} s: if each is a mean of that time, gusts count in full, while the laws were \
                 fitted to longer means; the total is too high against hourly records."
            ),
        ));
    }
    cautions
}

#[cfg(test)]
mod tests {
    use super::*;

    fn codes(height_m: f64, interval_s: Option<f64>) -> Vec<&'static str> {
        let site = Site { height_m, roughness_m: 1e-3, air: None, gravity: None, is_earth: true };
        of(&site, interval_s).into_iter().map(|c| c.code).collect()
    }

    #[test]
    fn an_hourly_record_at_ten_metres_has_none() {
        assert!(codes(10.0, Some(3600.0)).is_empty());
        assert_eq!(codes(2.0, None), ["height"]);
        assert_eq!(codes(80.0, Some(60.0)), ["height", "short-means"]);
    }
}
