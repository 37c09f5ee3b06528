//! Pictures made by the CPU painter.

use super::harness;

fn card(ui: &mut egui::Ui) {
    ui.heading("Sorrel Reach");
    ui.label("The long dunes trend 072° ± 3°.");
    ui.horizontal(|ui| {
        let _ = ui.button("Measure");
        ui.checkbox(&mut true, "Show strokes");
    });
    ui.add(egui::ProgressBar::new(0.6).text("60 %"));
}

#[test]
fn the_same_view_gives_the_same_bytes() {
    let picture =
        || harness::window([260.0, 120.0], egui::Theme::Light).build_ui(card).render().expect("a picture");
    let (a, b) = (picture(), picture());
    assert_eq!(a.as_raw(), b.as_raw());
    let darkest = a.pixels().map(|p| p.0[0]).min();
    assert!(darkest < Some(120), "text must be dark on a light ground, darkest {darkest:?}");
}
