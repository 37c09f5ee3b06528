//! `run`: everything a sheet asks for.

use std::path::Path;

use crate::plate::crest_sentence;
use crate::study::check::problems;
use crate::study::run::{Memo, run as run_study};
use crate::study::{Findings, Sheet, Sources};

use super::check::read_sheet;
use super::progress::watched;
use super::write::write;
use super::{Outcome, Trouble};

pub fn run(path: &Path, out: Option<&Path>) -> Result<Outcome, Trouble> {
    let sheet = read_sheet(path)?;
    let name = path.file_name().map_or(String::new(), |n| n.to_string_lossy().into_owned());
    let stem = name.strip_suffix(".sheet.json").unwrap_or(&name).to_owned();
    let beside = path.with_file_name(format!("{stem}-findings"));
    study(&sheet, out.unwrap_or(&beside))
}

/// Measures, judges, writes and prints.
pub fn study(sheet: &Sheet, out: &Path) -> Result<Outcome, Trouble> {
    let sources = Sources::open(sheet);
    let found = problems(sheet, &sources);
    for problem in &found {
        eprintln!("problem: {}: {}", problem.what, problem.why);
    }
    if !sheet.rasters.is_empty() && sources.rasters.is_empty() {
        return Err(Trouble::new(
            "no raster of the sheet can be opened",
            found.first().map_or(String::new(), |p| p.why.clone()),
            "Paths count from the sheet's folder; `ventifact check SHEET` lists all problems.",
        ));
    }
    let findings = watched(|work| run_study(sheet, &sources, &Memo::default(), work))
        .map_err(|e| Trouble::new("the run did not finish", e, "Start it again; nothing was written."))?;
    let written = write(out, sheet, &sources, &findings)?;
    print(&findings);
    eprintln!("\n{} files in {}", written, out.display());
    Ok(if findings.failures.is_empty() { Outcome::Done } else { Outcome::PartFailed })
}

/// The findings as sentences, each with its cautions.
fn print(findings: &Findings) {
    for wind in &findings.winds {
        let toward = wind.flux.toward.map_or("no drift".to_owned(), |a| {
            let half = wind.flux.toward_ci95_half_deg.map_or(String::new(), |h| format!(" ± {h:.0}°"));
            format!("sand goes toward {:.0}°{half}", a.deg())
        });
        let ratio =
            wind.flux.ratio.map_or(String::new(), |r| format!(", {:.0} % of it on balance", 100.0 * r));
        println!(
            "Winds of {}: {} of {} rows used, {toward}{ratio} ({}).",
            wind.name, wind.used, wind.rows, wind.law
        );
        if let Some(dp) = &wind.fryberger {
            println!("  drift potential {:.1} {}", dp.total, dp.unit);
        }
        if let Some(sentence) = wind.thinning.as_ref().and_then(|t| t.six_hourly()) {
            println!("  {sentence}");
        }
        for aside in &wind.set_aside {
            println!("  set aside: {} [{}]", aside.text, aside.code);
        }
        for caution in &wind.cautions {
            println!("  caution: {} [{}]", caution.text, caution.code);
        }
    }
    for patch in &findings.patches {
        println!("{}", patch.sentence);
        if patch.crests.is_ok() {
            println!("  {}", crest_sentence(patch));
        }
        for recovery in findings.recoveries.iter().filter(|r| r.patch == patch.id) {
            println!("  {}", recovery.sentence);
        }
        for caution in patch.cautions.iter().chain(patch.verdicts.iter().flat_map(|v| &v.cautions)) {
            println!("  caution: {} [{}]", caution.text, caution.code);
        }
    }
    for network in &findings.networks {
        println!("{}", network.sentence);
        for (_, name, a) in &network.agreements {
            println!(
                "  against {name}: {:.0} % of its length found, {:.0} % of this one confirmed",
                100.0 * a.found,
                100.0 * a.confirmed
            );
        }
        for caution in &network.cautions {
            println!("  caution: {} [{}]", caution.text, caution.code);
        }
    }
    for comparison in &findings.comparisons {
        println!("{}", comparison.sentence);
        for caution in &comparison.cautions {
            println!("  caution: {} [{}]", caution.text, caution.code);
        }
    }
    for joint in &findings.together.joint {
        println!("{}", joint.sentence);
        for trend in &joint.trends {
            let cover = if trend.supply_ln > 0.0 { "sand-covered" } else { "starved" };
            println!(
                "  {}: {:.0}°, {:.1} times likelier on {cover} ground",
                trend.name,
                trend.axis.deg(),
                trend.supply_ln.abs().exp()
            );
        }
    }
    for failure in &findings.failures {
        eprintln!("failed: {}: {}", failure.what, failure.why);
    }
}
