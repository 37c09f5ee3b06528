//! The plate on the bench and its export: composed in the background from the findings at hand.

use std::path::{Path, PathBuf};
use std::sync::Arc;

use serde::{Deserialize, Serialize};

use crate::files::save;
use crate::plate::{Figure, PngSize, Theme, compose, pdf, png, svg};
use crate::study::handover::write_all;
use crate::study::{Findings, Id, Patch, Sheet, Sources, fingerprint, run};

use super::{Answer, Model, Page, Slot, comparing, recovering};

/// What the plate is to be; saved with the view.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(default)]
pub struct PlateChoice {
    pub motif: Motif,
    pub width_mm: f64,
    pub format: Format,
    /// Of a PNG.
    pub dpi: f64,
    /// The trend on a patch's map as a flow texture, in place of strokes.
    pub flow: bool,
}

#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum Motif {
    /// The selected patch.
    #[default]
    Patch,
    /// The crests of the selected patch.
    Crests,
    /// The selected network.
    Network,
    /// The raster on the table with all its patches and networks.
    Overview,
}

#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum Format {
    #[default]
    Svg,
    Png,
    Pdf,
}

/// The plate as it was last composed.
#[derive(Debug, Default)]
pub struct Preview {
    /// Of what it shows.
    key: String,
    /// The figure, or why there is none; `None` while it is being composed.
    pub outcome: Option<Result<Arc<Figure>, String>>,
}

impl Default for PlateChoice {
    fn default() -> Self {
        Self {
            motif: Motif::default(),
            width_mm: compose::WIDTH_MM,
            format: Format::default(),
            dpi: 300.0,
            flow: false,
        }
    }
}

impl PlateChoice {
    /// Narrower and nothing fits; wider is a poster.
    pub const WIDTHS_MM: [f64; 2] = [120.0, 600.0];
    pub const DPI: [f64; 2] = [36.0, 1200.0];
}

impl Format {
    pub const ALL: [Self; 3] = [Self::Svg, Self::Png, Self::Pdf];

    /// The ending of its files.
    pub fn ending(self) -> &'static str {
        match self {
            Self::Svg => "svg",
            Self::Png => "png",
            Self::Pdf => "pdf",
        }
    }
}

/// Composes the preview again when the plate page is open and what it shows has changed.
pub fn follow(model: &mut Model) {
    if model.view.page != Page::Plate {
        return;
    }
    let key = key(model);
    if model.session.preview.key == key {
        return;
    }
    let subject = Subject::of(model);
    let choice = model.view.plate.clone();
    model.session.preview = Preview { key, outcome: None };
    model.session.jobs.start(Slot::Plate, "Composing the plate", move |work, post| {
        let outcome = subject.compose(&choice, work).map(Arc::new);
        if !work.is_stopped() {
            post.answer(Answer::Plate(outcome));
        }
    });
}

/// What the preview depends on.
fn key(model: &Model) -> String {
    let choice = &model.view.plate;
    let results = &model.session.results;
    let subject: Vec<String> = match choice.motif {
        Motif::Patch | Motif::Crests => {
            let stamps = |p: &&Patch| {
                let recovery = results.recovered(p.id).map(|r| r.fingerprint.as_str());
                let recovered = format!("{recovery:?} {:?}", results.recovery_standing(p.id));
                let of_patch = model.sheet.comparisons.iter().filter(|c| c.patch == p.id);
                let compared = of_patch.map(|c| {
                    let made = results.compared(c.id).map(|made| made.fingerprint.as_str());
                    format!("{made:?} {:?}", results.comparison_standing(c.id))
                });
                [results.stamp(p.id), recovered].into_iter().chain(compared).collect::<Vec<_>>()
            };
            model.selected_patch().iter().flat_map(stamps).collect()
        }
        // Its plate shows the patches of the raster and the networks it is compared with.
        Motif::Network | Motif::Overview => {
            let chosen = model.view.network.map(|id| format!("{id:?}"));
            let patches = model.sheet.patches.iter().map(|p| results.stamp(p.id));
            let networks = model.sheet.networks.iter().map(|n| results.network_stamp(n.id));
            patches.chain(networks).chain(chosen).collect()
        }
    };
    let raster = model.shown_raster().map(|r| (r.id, r.tone, model.session.sources.contains_key(&r.id)));
    let form = (choice.motif, choice.width_mm, choice.flow);
    format!("{form:?} {subject:?} {raster:?} {}", model.sheet.title)
}

/// Everything a plate is composed of, apart from the model.
pub struct Subject {
    sheet: Sheet,
    sources: Sources,
    findings: Findings,
    patch: Option<Id>,
    network: Option<Id>,
    raster: Option<Id>,
}

impl Subject {
    pub fn of(model: &Model) -> Self {
        Self {
            sheet: model.sheet.clone(),
            sources: Sources { rasters: model.session.sources.clone(), ..Sources::default() },
            findings: findings(model),
            patch: model.view.patch,
            network: model.view.network,
            raster: model.shown_raster().map(|r| r.id),
        }
    }

    /// # Errors
    /// Why there is no plate, in words.
    pub fn compose(&self, choice: &PlateChoice, work: &crate::ground::Work) -> Result<Figure, String> {
        let theme = Theme::print();
        match choice.motif {
            Motif::Patch => {
                let id = self.patch.ok_or("no patch is selected")?;
                let finding = self.findings.patches.iter().find(|p| p.id == id);
                let finding = finding.ok_or("the patch is not measured yet")?;
                let print = compose::Print { width_mm: choice.width_mm, theme: &theme, flow: choice.flow };
                compose::of_patch(&self.sheet, &self.sources, finding, &self.findings, &print, work)
            }
            Motif::Crests => {
                let id = self.patch.ok_or("no patch is selected")?;
                let finding = self.findings.patches.iter().find(|p| p.id == id);
                let finding = finding.ok_or("the patch is not measured yet")?;
                compose::of_crests(&self.sheet, &self.sources, finding, choice.width_mm, &theme, work)
            }
            Motif::Network => {
                let id = self.network.ok_or("no network is selected")?;
                let finding = self.findings.networks.iter().find(|n| n.id == id);
                let finding = finding.ok_or("the network is not measured as the sheet stands")?;
                compose::of_network(
                    &self.sheet,
                    &self.sources,
                    finding,
                    &self.findings,
                    choice.width_mm,
                    &theme,
                    work,
                )
            }
            Motif::Overview => {
                let raster = self.raster.ok_or("no raster is on the table")?;
                compose::overview(
                    &self.sheet,
                    &self.sources,
                    &self.findings,
                    raster,
                    choice.width_mm,
                    &theme,
                    work,
                )
            }
        }
    }

    /// Writes everything the study found, with a plate of each patch and raster, into `folder`.
    ///
    /// # Errors
    /// What could not be made or written, in words.
    pub fn hand_over(&self, folder: &Path, work: &crate::ground::Work) -> Result<usize, String> {
        let plates = compose::all(&self.sheet, &self.sources, &self.findings, work)?;
        let written = write_all(folder, &self.sheet, &self.sources, &self.findings, &plates);
        written.map(|names| names.len()).map_err(|e| e.to_string())
    }
}

/// The findings at hand that are as the sheet stands.
fn findings(model: &Model) -> Findings {
    let (sheet, session) = (&model.sheet, &model.session);
    let current = |id: &Id| session.results.standing(*id).is_current();
    let ids = || sheet.patches.iter().map(|p| p.id);
    let rasters = sheet.rasters.iter().filter_map(|r| Some(run::raster(r, session.sources.get(&r.id)?)));
    Findings {
        sheet_fingerprint: fingerprint::of_sheet(sheet),
        rasters: rasters.collect(),
        winds: sheet.winds.iter().filter_map(|w| session.results.wind(w.id)?.outcome.clone().ok()).collect(),
        patches: ids().filter(current).filter_map(|id| session.results.patch(id).cloned()).collect(),
        networks: sheet
            .networks
            .iter()
            .filter(|n| session.results.network_standing(n.id).is_current())
            .filter_map(|n| session.results.network(n.id).map(|finding| (**finding).clone()))
            .collect(),
        together: session.results.together().cloned().unwrap_or_default(),
        recoveries: recovering::current(sheet, &session.results),
        comparisons: comparing::current(sheet, &session.results),
        failures: session.results.failures(sheet),
    }
}

/// Writes `figure` in the chosen format.
///
/// # Errors
/// Why not, in words.
pub fn export(figure: &Figure, choice: &PlateChoice, path: &Path) -> Result<(), String> {
    let bytes = match choice.format {
        Format::Svg => svg(figure).into_bytes(),
        Format::Png => png(figure, PngSize::Dpi(choice.dpi)).map_err(|e| e.to_string())?,
        Format::Pdf => pdf(figure).map_err(|e| e.to_string())?,
    };
    save::bytes(path, &bytes, None).map_err(|e| format!("{}: {e}", path.display()))
}

/// `path` with the ending of `format`, when it has none.
pub fn with_ending(path: PathBuf, format: Format) -> PathBuf {
    if path.extension().is_some() { path } else { path.with_extension(format.ending()) }
}
