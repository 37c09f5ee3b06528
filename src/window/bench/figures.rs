//! Figures made once for each finding and width: some are made of thousands of lines.

use std::any::Any;
use std::collections::BTreeMap;
use std::sync::Arc;

use egui::Ui;

use super::figure_mm;
use crate::plate::{Figure, Theme};
use crate::window::{figure, theme};

/// The figures at hand, by name.
#[derive(Clone, Default)]
struct Kept(BTreeMap<&'static str, Made>);

#[derive(Clone)]
struct Made {
    finding: Arc<dyn Any + Send + Sync>,
    width_mm: f64,
    is_dark: bool,
    figure: Arc<Figure>,
}

/// Shows the figure called `name`, made by `make` when there is none for this finding, width and look.
pub fn show<T: Send + Sync + 'static>(
    ui: &mut Ui,
    look: &Theme,
    finding: &Arc<T>,
    name: &'static str,
    spoken: &str,
    make: impl FnOnce(&T, f64, &Theme) -> Figure,
) {
    let width_mm = figure_mm(ui);
    let key = egui::Id::unique("figures of findings");
    let mut kept = ui.data(|data| data.get_temp::<Arc<Kept>>(key)).unwrap_or_default();
    let fits = |made: &Made| {
        std::ptr::addr_eq(Arc::as_ptr(&made.finding), Arc::as_ptr(finding))
            && made.width_mm == width_mm
            && made.is_dark == look.is_dark
    };
    let made = kept.0.get(name).filter(|made| fits(made)).map(|made| Arc::clone(&made.figure));
    let made = made.unwrap_or_else(|| {
        let figure = Arc::new(make(finding, width_mm, look));
        let made = Made {
            finding: Arc::<T>::clone(finding),
            width_mm,
            is_dark: look.is_dark,
            figure: Arc::clone(&figure),
        };
        Arc::make_mut(&mut kept).0.insert(name, made);
        ui.data_mut(|data| data.insert_temp(key, kept));
        figure
    });
    figure::show(ui, &made, theme::POINTS_PER_MM, spoken);
    ui.add_space(4.0);
}
