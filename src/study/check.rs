//! All problems of a sheet at once.

use std::collections::BTreeSet;

use crate::ground::Body;

use super::{Failure, Id, Sheet, Sources, WindChoice, all_settings, judges};
use super::{comparison_check, crest_check, network_check};

/// Bodies that cannot be, and names that mean two of them.
fn bodies(sheet: &Sheet, say: &mut impl FnMut(String, String)) {
    let mut names: BTreeSet<String> = Body::known().into_iter().map(|body| body.name).collect();
    for body in &sheet.bodies {
        let what = format!("body {}", body.name);
        if !names.insert(body.name.clone()) {
            say(what.clone(), "its name is taken; give it one of its own".into());
        }
        if let Some(problem) = body.problem() {
            say(what, problem);
        }
    }
    let on_rasters = sheet.rasters.iter().map(|r| (format!("raster {}", r.name), &r.placement.body));
    let of_winds = sheet.winds.iter().map(|w| (format!("wind record {}", w.name), &w.body));
    for (what, body) in on_rasters.chain(of_winds) {
        if let Some(problem) = body.as_ref().and_then(Body::problem) {
            say(what, format!("its body: {problem}"));
        }
    }
}

/// What would fail or mislead when the sheet is run: files that do not open, names that point nowhere,
/// outlines without area or off their raster, settings out of range.
pub fn problems(sheet: &Sheet, sources: &Sources) -> Vec<Failure> {
    let mut found = sources.failures.clone();
    let mut say = |what: String, why: String| found.push(Failure { what, why });
    let mut ids = BTreeSet::new();
    let all =
        sheet.rasters.iter().map(|r| (r.id, &r.name)).chain(sheet.patches.iter().map(|p| (p.id, &p.name)));
    let all = all.chain(sheet.winds.iter().map(|w| (w.id, &w.name)));
    let all = all.chain(sheet.obstacles.iter().map(|o| (o.id, &o.name)));
    let all = all.chain(sheet.comparisons.iter().map(|c| (c.id, &c.name)));
    for (Id(id), name) in all.chain(sheet.networks.iter().map(|n| (n.id, &n.name))) {
        if !ids.insert(id) {
            say(
                name.clone(),
                format!(
                    "its id {id} is used twice; every raster, patch, record, outcrop, network and comparison needs its own"
                ),
            );
        }
    }
    for setting in all_settings() {
        if let Some(problem) = setting.problem(&sheet.settings) {
            say("settings".into(), problem);
        }
    }
    if sheet.settings.verdict.priors.weights().iter().sum::<f64>() <= 0.0 {
        say("settings".into(), "verdict.priors are all zero; at least one theory needs a weight".into());
    }
    if (1..12).contains(&sheet.settings.recovery.trends) {
        say("settings".into(), "recovery.trends must be 12 or more, or 0 to leave the test out".into());
    }
    bodies(sheet, &mut say);
    let bins = 180.0 / sheet.settings.statistics.rose_bin_deg;
    if (bins - bins.round()).abs() > 1e-9 {
        say("settings".into(), "statistics.rose_bin_deg must divide 180".into());
    }
    for patch in &sheet.patches {
        let what = format!("patch {}", patch.name);
        if patch.outline.outer.len() < 3 || patch.outline.area() <= 0.0 {
            say(what.clone(), "its outline has no area; outline it again".into());
        }
        for wind in patch.winds.named().iter().filter(|id| sheet.wind(**id).is_none()) {
            say(what.clone(), format!("it names wind record {}, which the sheet does not have", wind.0));
        }
        if matches!(&patch.winds, WindChoice::Chosen(ids) if ids.is_empty()) {
            say(what.clone(), "it chooses its wind records, but names none".into());
        }
        if let (WindChoice::Nearest, Some(open)) = (&patch.winds, sources.rasters.get(&patch.raster)) {
            let judges = judges::of_patch(sheet, patch, Some(&open.place));
            judges.cautions.into_iter().for_each(|c| say(what.clone(), c.text));
        }
        match (sheet.raster(patch.raster), sources.rasters.get(&patch.raster), patch.outline.bounds()) {
            (None, ..) => {
                say(what, format!("it lies on raster {}, which the sheet does not have", patch.raster.0))
            }
            (Some(_), Some(open), Some(b)) => {
                let info = open.raster.info();
                let (w, h) = (info.width as f64, info.height as f64);
                if b.max.x <= 0.0 || b.max.y <= 0.0 || b.min.x >= w || b.min.y >= h {
                    say(what, format!("it lies outside its raster of {w} × {h} pixels"));
                }
            }
            _ => {}
        }
    }
    obstacles(sheet, sources, &mut say);
    crest_check::crests(sheet, sources, &mut say);
    network_check::networks(sheet, sources, &mut say);
    comparison_check::comparisons(sheet, sources, &mut say);
    found
}

/// Outcrops without area, off their raster, or in no patch.
fn obstacles(sheet: &Sheet, sources: &Sources, say: &mut impl FnMut(String, String)) {
    let s = &sheet.settings.obstacle;
    if s.inner_radii >= s.outer_radii {
        say("settings".into(), "obstacle.inner_radii must be below obstacle.outer_radii".into());
    }
    for obstacle in &sheet.obstacles {
        let what = format!("outcrop {}", obstacle.name);
        if obstacle.outline.outer.len() < 3 || obstacle.outline.area() <= 0.0 {
            say(what, "its outline has no area; outline it again".into());
            continue;
        }
        let Some(open) = sources.rasters.get(&obstacle.raster) else {
            if sheet.raster(obstacle.raster).is_none() {
                say(what, format!("it lies on raster {}, which the sheet does not have", obstacle.raster.0));
            }
            continue;
        };
        let patches = sheet.patches.iter().filter(|p| p.raster == obstacle.raster);
        if !patches.into_iter().any(|p| super::obstacles::belongs(obstacle, p, &open.place, s)) {
            say(
                what,
                format!(
                    "no patch holds half of the ground round it ({} to {} radii), so it is not tested; outline a patch about it",
                    s.inner_radii, s.outer_radii
                ),
            );
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn too_few_trends_laid_in_are_refused_and_none_is_not() {
        let mut sheet = Sheet::empty("t");
        let said = |sheet: &Sheet| problems(sheet, &Sources::default()).len();
        for (trends, problems) in [(0, 0), (1, 1), (11, 1), (12, 0), (90, 0)] {
            sheet.settings.recovery.trends = trends;
            assert_eq!(said(&sheet), problems, "{trends} trends");
        }
    }

    #[test]
    fn bodies_that_cannot_be_or_share_a_name_are_named() {
        let mut sheet = Sheet::empty("t");
        let own = |name: &str, gravity: f64| Body {
            name: name.into(),
            gravity: Some(gravity),
            ..Body::cold_nitrogen_moon()
        };
        sheet.bodies = vec![own("Sorrel", 1.0), own("Sorrel", 1.0), own("Mars", 1.0), own("Heavy", f64::NAN)];
        let said: Vec<_> = problems(&sheet, &Sources::default()).into_iter().map(|f| f.what).collect();
        assert_eq!(said, ["body Sorrel", "body Mars", "body Heavy"]);
        sheet.bodies.truncate(1);
        assert!(problems(&sheet, &Sources::default()).is_empty());
    }
}
