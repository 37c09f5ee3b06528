//! The pictures of the documents: the whole window on the demo, by day and by night, on a small and
//! a large screen. `UPDATE_PICTURES=1` writes them into docs/pictures.

use std::sync::Arc;
use std::time::{Duration, Instant};

use egui::Theme;
use egui_kittest::Harness;
use ventifact::desk::{Command, Model, Opened, Page, PatchCommand, SheetCommand, ViewCommand};
use ventifact::study::demo;
use ventifact::window::App;

use super::harness::{self, compare};

/// Pictures the window on the demo with everything measured: bench page `page`, the `patch`th
/// entry of the ledger selected.
fn picture(size: [f32; 2], theme: Theme, page: Page, patch: usize, path: &str) {
    let folder = tempfile::tempdir().expect("a temporary folder");
    let sheet = demo::lay_out(folder.path()).expect("the demo is laid out");
    let show = |ui: &mut egui::Ui, app: &mut Option<App>| match app {
        Some(app) => {
            app.take_in(ui.ctx());
            app.show(ui);
        }
        None => *app = Some(App::new(ui.ctx(), Model::new(Arc::new(|| ())), false)),
    };
    let mut harness = harness::window(size, theme).build_ui_state(show, None);
    let app = harness.state_mut().as_mut().expect("the first frame makes the application");
    app.give(Command::Sheet(SheetCommand::Open(sheet)));
    if theme == Theme::Dark {
        app.give(Command::View(ViewCommand::Theme));
    }
    app.give(Command::View(ViewCommand::Page(page)));
    let chosen = app.model().sheet.patches.get(patch).map(|p| p.id);
    app.give(Command::Patch(PatchCommand::Select(chosen)));

    rest(&mut harness);
    if page == Page::Crests {
        let app = harness.state_mut().as_mut().expect("the application");
        app.give(Command::View(ViewCommand::WholePatch));
        // Strokes would lie along the lines that are to be seen.
        app.give(Command::View(ViewCommand::Strokes));
        rest(&mut harness);
    }
    compare(&harness.render().expect("a picture"), path);
}

/// Draws frames until everything is measured and drawn.
fn rest(harness: &mut Harness<'_, Option<App>>) {
    let end = Instant::now() + Duration::from_secs(240);
    let at_rest = |model: &Model| {
        let laid = || model.session.rasters.values().filter_map(Opened::laid);
        model.session.jobs.is_idle()
            && model.session.results.wanting(&model.sheet).is_empty()
            && model.session.results.networks_wanting(&model.sheet).is_empty()
            && model.session.results.has_winds(&model.sheet)
            && laid().count() == model.sheet.rasters.len()
            && laid().all(|laid| laid.tiles.is_idle())
    };
    let mut quiet = 0;
    while quiet < 8 {
        assert!(Instant::now() < end, "the window never came to rest");
        harness.step();
        let model = harness.state().as_ref().expect("the application").model();
        quiet = if at_rest(model) { quiet + 1 } else { 0 };
        std::thread::sleep(Duration::from_millis(5));
    }
}

#[test]
fn trend_by_day_on_a_small_screen() {
    picture([1280.0, 800.0], Theme::Light, Page::Trend, 0, "docs/pictures/trend-light-1280x800.png");
}

#[test]
fn verdict_by_night_on_a_small_screen() {
    picture([1280.0, 800.0], Theme::Dark, Page::Verdict, 1, "docs/pictures/verdict-dark-1280x800.png");
}

#[test]
fn verdict_by_day_on_a_large_screen() {
    picture([1920.0, 1200.0], Theme::Light, Page::Verdict, 0, "docs/pictures/verdict-light-1920x1200.png");
}

#[test]
fn spacing_by_night_on_a_large_screen() {
    picture([1920.0, 1200.0], Theme::Dark, Page::Spacing, 1, "docs/pictures/spacing-dark-1920x1200.png");
}

#[test]
fn crests_by_day_on_a_small_screen() {
    picture([1280.0, 800.0], Theme::Light, Page::Crests, 0, "docs/pictures/crests-light-1280x800.png");
}

#[test]
fn crests_by_night_on_a_large_screen() {
    picture([1920.0, 1200.0], Theme::Dark, Page::Crests, 1, "docs/pictures/crests-dark-1920x1200.png");
}
