//! What the sand does under the air of a wind record: when it starts to move by each published law, how
//! fast it falls, with what spacing dunes start on it, and whether a measured spacing can be that one.

use crate::ground::{Air, Body, Caution, LengthUnit};
use crate::science::wind::air::kinematic_viscosity;
use crate::science::wind::drift_potential;
use crate::science::wind::log_law::friction_ratio;
use crate::science::wind::saturation::{
    STRESS_COEFFICIENTS, cutoff_wavelength, fastest_wavelength, minimal_wavelength, saturation_length,
    settling_velocity,
};
use crate::science::wind::{Bed, Threshold, threshold};

use super::sentence::length;
use super::{Id, SpectrumFinding, WindEntry, WindSettings};

/// The sand at the site of a wind record.
#[derive(Clone, Debug, PartialEq)]
pub struct SandFinding {
    pub body: String,
    pub air: Air,
    /// m s⁻².
    pub gravity: f64,
    /// By each law, in the order of their publication.
    pub thresholds: Vec<SandThreshold>,
    /// Of one grain through the still air, m s⁻¹.
    pub settling_m_s: f64,
    pub saturation_length_m: f64,
    /// The spacing with which dunes start, by each rule.
    pub first_waves: Vec<FirstWave>,
    /// Least and greatest of them, with grain and grain density as doubtful as the settings say, m.
    pub first_wave_m: [f64; 2],
    /// The same for the shortest wave that grows at all, m.
    pub shortest_wave_m: [f64; 2],
}

/// When sand starts to move, by one law.
#[derive(Clone, Debug, PartialEq)]
pub struct SandThreshold {
    pub law: &'static str,
    /// Key of its record.
    pub method: &'static str,
    /// Friction velocity, m s⁻¹.
    pub ustar: Doubtful,
    /// Wind at the anemometer and at 10 m over the ground, m s⁻¹.
    pub speed_at_mast: Doubtful,
    pub speed_at_10_m: Doubtful,
}

/// A figure, and the least and greatest it may be while grain, density and cohesion are doubtful.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Doubtful {
    pub value: f64,
    pub low: f64,
    pub high: f64,
}

/// Spacing of first dunes by one rule.
#[derive(Clone, Debug, PartialEq)]
pub struct FirstWave {
    /// `"A 3.6, B 1.9"`, `"53 d ρp/ρ"`.
    pub rule: String,
    pub wavelength_m: f64,
    /// Shortest wave that grows; `None` where the rule says nothing of it.
    pub shortest_m: Option<f64>,
}

/// A measured spacing against that of first dunes.
#[derive(Clone, Debug, PartialEq)]
pub struct BirthFinding {
    pub winds: Id,
    pub winds_name: String,
    pub standing: Birth,
    /// Spacing over the spacing of first dunes, least and greatest: both intervals count.
    pub ratio: [f64; 2],
    pub sentence: String,
}

/// Whether a spacing can be the one dunes start with.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Birth {
    /// Longer than any first spacing: the dunes have grown.
    Grown,
    /// It may be the first.
    FirstBorn,
    /// Shorter than the first spacing, yet long enough to grow.
    Short,
    /// Shorter than the shortest wave that grows.
    TooShort,
}

impl Birth {
    /// As in `findings.json`.
    pub fn key(self) -> &'static str {
        match self {
            Self::Grown => "grown",
            Self::FirstBorn => "first-born",
            Self::Short => "short",
            Self::TooShort => "too-short",
        }
    }
}

impl Doubtful {
    fn times(self, factor: f64) -> Self {
        Self { value: self.value * factor, low: self.low * factor, high: self.high * factor }
    }
}

/// The sand at the site of `entry`; `None` where air or gravity are not known or not above zero.
pub fn sand(entry: &WindEntry, settings: &WindSettings) -> Option<SandFinding> {
    let body = entry.body.clone().unwrap_or_else(Body::earth);
    if body.problem().is_some() {
        return None;
    }
    let (air, gravity) = body.air.zip(body.gravity)?;
    let bed = Bed {
        grain: settings.grain_m,
        grain_density: settings.grain_density,
        air,
        gravity,
        cohesion: settings.cohesion_kg_s2,
    };
    let per_friction = |height: f64| 1.0 / friction_ratio(height, entry.roughness_m);
    let thresholds = Threshold::ALL.map(|law| {
        let ustar = doubtful(law, &bed, settings);
        SandThreshold {
            law: law.label(),
            method: method(law),
            ustar,
            speed_at_mast: ustar.times(per_friction(entry.height_m)),
            speed_at_10_m: ustar.times(per_friction(drift_potential::HEIGHT)),
        }
    });
    let ratio = bed.grain_density / air.density;
    let saturation = saturation_length(bed.grain, ratio);
    let first_waves = first_waves(bed.grain, ratio);
    let doubt = settings.grain_doubt * settings.grain_density_doubt;
    let span = |waves: &mut dyn Iterator<Item = f64>| {
        let [low, high] = waves.fold([f64::INFINITY, 0.0f64], |[low, high], w| [low.min(w), high.max(w)]);
        [low / doubt, high * doubt]
    };
    Some(SandFinding {
        body: body.name,
        air,
        gravity,
        thresholds: thresholds.into(),
        settling_m_s: settling_velocity(bed.grain, ratio - 1.0, gravity, kinematic_viscosity(air)),
        saturation_length_m: saturation,
        first_wave_m: span(&mut first_waves.iter().map(|w| w.wavelength_m)),
        shortest_wave_m: span(&mut first_waves.iter().filter_map(|w| w.shortest_m)),
        first_waves,
    })
}

fn method(law: Threshold) -> &'static str {
    match law {
        Threshold::Bagnold => threshold::BAGNOLD.id,
        Threshold::IversenWhite => threshold::IVERSEN_WHITE.id,
        Threshold::ShaoLu => threshold::SHAO_LU.id,
    }
}

/// A law's threshold and its range. It grows with density and cohesion, so their ends hold its ends; over
/// the grain it may pass through its minimum, so the grains between are tried too.
fn doubtful(law: Threshold, bed: &Bed, s: &WindSettings) -> Doubtful {
    const GRAINS: i32 = 32;
    let at = |grain_power: f64, side: f64| {
        law.friction_velocity(&Bed {
            grain: bed.grain * s.grain_doubt.powf(grain_power),
            grain_density: bed.grain_density * s.grain_density_doubt.powf(side),
            cohesion: bed.cohesion * s.cohesion_doubt.powf(side),
            ..*bed
        })
    };
    let powers = || (-GRAINS..=GRAINS).map(|k| f64::from(k) / f64::from(GRAINS));
    Doubtful {
        value: law.friction_velocity(bed),
        low: powers().map(|power| at(power, -1.0)).fold(f64::INFINITY, f64::min),
        high: powers().map(|power| at(power, 1.0)).fold(0.0, f64::max),
    }
}

fn first_waves(grain: f64, density_ratio: f64) -> Vec<FirstWave> {
    let saturation = saturation_length(grain, density_ratio);
    let of_pair = STRESS_COEFFICIENTS.map(|(a, b)| FirstWave {
        rule: format!("A {a:.1}, B {b:.1}"),
        wavelength_m: saturation * fastest_wavelength(a, b),
        shortest_m: Some(saturation * cutoff_wavelength(a, b)),
    });
    let rule = FirstWave {
        rule: "53 d ρp/ρ".into(),
        wavelength_m: minimal_wavelength(grain, density_ratio),
        shortest_m: None,
    };
    std::iter::once(rule).chain(of_pair).collect()
}

/// Whether the spacing of a patch is one that dunes of this sand start with; `None` without a spacing in
/// metres.
pub fn birth(
    spectrum: &SpectrumFinding,
    unit: LengthUnit,
    (winds, winds_name): (Id, &str),
    sand: &SandFinding,
) -> Option<BirthFinding> {
    let spacing = spectrum.spacing.filter(|_| spectrum.defined && unit == LengthUnit::Metre)?;
    let [least, greatest] = spectrum.spacing_ci95.unwrap_or([spacing; 2]);
    let [first, last] = sand.first_wave_m;
    let ratio = [least / last, greatest / first];
    let span = format!("{} to {}", length(first, unit), length(last, unit));
    let sand_of = format!("sand under the air of “{}”", sand.body);
    let (standing, sentence) = if ratio[0] > 1.0 {
        let times = format!("{} to {} times", times(ratio[0]), times(ratio[1]));
        (Birth::Grown, format!("{times} the spacing of first dunes ({span} for {sand_of}): grown, not new."))
    } else if ratio[1] >= 1.0 {
        (
            Birth::FirstBorn,
            format!("Within the spacing of first dunes ({span} for {sand_of}): they may be new."),
        )
    } else if greatest >= sand.shortest_wave_m[0] {
        (
            Birth::Short,
            format!(
                "Shorter than the spacing of first dunes ({span} for {sand_of}), yet long enough to grow."
            ),
        )
    } else {
        (Birth::TooShort, format!("Too short to grow as dunes of {sand_of}, which start {span} apart."))
    };
    Some(BirthFinding { winds, winds_name: winds_name.into(), standing, ratio, sentence })
}

/// A spacing that cannot be that of dunes of this sand.
pub fn caution(birth: &BirthFinding, sand: &SandFinding) -> Option<Caution> {
    let [least, greatest] = sand.shortest_wave_m.map(|m| length(m, LengthUnit::Metre));
    (birth.standing == Birth::TooShort).then(|| {
        Caution::new(
            "below-shortest-wave",
            format!(
                "The spacing is below the shortest wave that grows as a dune of this sand ({least} to {greatest} by the winds of “{}”): these are ripples, or grain or air are others than stated.",
                birth.winds_name
            ),
        )
    })
}

/// A ratio without false figures: two of them below 100, whole above.
fn times(ratio: f64) -> String {
    match ratio {
        r if r < 10.0 => format!("{r:.1}"),
        r if r < 100.0 => format!("{r:.0}"),
        r => format!("{:.0}", (r / 10.0).round() * 10.0),
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::assert_close;
    use crate::files::wind_table::{DirectionSense, SpeedUnit, WindImport, WindLayout, ZeroDirection};
    use crate::study::Settings;

    fn mast(body: Option<Body>) -> WindEntry {
        let import = WindImport {
            delimiter: ',',
            header_lines: 1,
            layout: WindLayout::Series { time: vec![0], speed: 1, direction: 2 },
            speed_unit: SpeedUnit::MetrePerSecond,
            direction: DirectionSense::From,
            missing: Vec::new(),
            only: None,
            gust: None,
            zero_direction: ZeroDirection::North,
            day_first: false,
        };
        WindEntry {
            id: Id(3),
            name: "mast".into(),
            path: "mast.csv".into(),
            import,
            height_m: 5.0,
            roughness_m: 1e-3,
            body,
            at: None,
        }
    }

    fn spacing(metres: f64, interval: [f64; 2]) -> SpectrumFinding {
        SpectrumFinding {
            defined: true,
            spacing: Some(metres),
            spacing_ci95: Some(interval),
            ..SpectrumFinding::default()
        }
    }

    fn born(metres: f64, sand: &SandFinding) -> BirthFinding {
        let interval = [0.9 * metres, 1.1 * metres];
        birth(&spacing(metres, interval), LengthUnit::Metre, (Id(3), "mast"), sand).expect("a spacing")
    }

    #[test]
    fn thresholds_lie_within_their_ranges_and_speeds_follow_the_log_law() {
        let settings = Settings::default().wind;
        for body in Body::known().into_iter().filter(|body| body.air.is_some()) {
            let sand = sand(&mast(Some(body)), &settings).expect("air and gravity");
            assert_eq!(sand.thresholds.len(), 3);
            for t in &sand.thresholds {
                let Doubtful { value, low, high } = t.ustar;
                assert!(low < value && value < high, "{}: {} {:?}", sand.body, t.law, t.ustar);
                assert_close!(t.speed_at_10_m.value, value * (1e4f64).ln() / 0.4, 1e-9, "at 10 m");
                assert_close!(t.speed_at_mast.high, high * (5e3f64).ln() / 0.4, 1e-9, "at the mast");
            }
        }
    }

    /// Without doubt the range is the value; and the low end passes through the minimum over the grain.
    #[test]
    fn ranges_follow_the_doubt() {
        let certain = WindSettings {
            grain_doubt: 1.0,
            grain_density_doubt: 1.0,
            cohesion_doubt: 1.0,
            ..Settings::default().wind
        };
        let sure = sand(&mast(None), &certain).expect("Earth");
        for t in &sure.thresholds {
            assert_eq!([t.ustar.low, t.ustar.high], [t.ustar.value; 2], "{}", t.law);
        }
        // The easiest grain of Shao and Lu is 107 µm, threshold 0.2368 m/s: within 160 µm × or ÷ 2.
        let fine = WindSettings { grain_m: 160e-6, grain_doubt: 2.0, ..certain };
        let sand = sand(&mast(None), &fine).expect("Earth");
        assert_close!(sand.thresholds[2].ustar.low, 0.236_794, 2e-5, "minimum inside the range");
    }

    #[test]
    fn without_air_or_gravity_there_is_no_sand() {
        let settings = Settings::default().wind;
        assert_eq!(sand(&mast(Some(Body::moon())), &settings), None);
        let weightless = Body { gravity: None, ..Body::earth() };
        assert_eq!(sand(&mast(Some(weightless)), &settings), None);
    }

    /// Claudin & Andreotti 2006: 180 µm sand in air, about 20 m; kilometre dunes in cold dense gas are grown.
    #[test]
    fn a_spacing_is_new_grown_or_too_short() {
        let settings = WindSettings { grain_m: 180e-6, ..Settings::default().wind };
        let earth = sand(&mast(None), &settings).expect("Earth");
        assert_close!(earth.first_waves[0].wavelength_m, 53.0 * 180e-6 * 2650.0 / 1.225, 1e-3, "rule");
        assert_eq!(born(20.0, &earth).standing, Birth::FirstBorn);
        assert_eq!(born(6.0, &earth).standing, Birth::Short);
        let ripples = born(0.1, &earth);
        assert_eq!(ripples.standing, Birth::TooShort);
        assert!(caution(&ripples, &earth).expect("a caution").text.contains("ripples"));
        let ice = WindSettings { grain_density: 1000.0, ..settings };
        let moon = sand(&mast(Some(Body::cold_nitrogen_moon())), &ice).expect("cold nitrogen");
        let dunes = born(2500.0, &moon);
        assert_eq!(dunes.standing, Birth::Grown);
        assert!(dunes.ratio[0] > 800.0, "{:?}", dunes.ratio);
        assert!(dunes.sentence.contains("grown, not new"), "{}", dunes.sentence);
        assert_eq!(caution(&dunes, &moon), None);
    }

    #[test]
    fn a_spacing_in_pixels_says_nothing_of_birth() {
        let earth = sand(&mast(None), &Settings::default().wind).expect("Earth");
        let found = birth(&spacing(20.0, [19.0, 21.0]), LengthUnit::Pixel, (Id(3), "mast"), &earth);
        assert_eq!(found, None);
    }
}
