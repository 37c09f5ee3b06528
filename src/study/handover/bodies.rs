//! The bodies known by name as a page, each figure with its source.

use crate::ground::{Body, BodyFigure};

/// What follows the methods in `docs/methods.md`.
pub fn bodies_markdown() -> String {
    let mut text = String::from(
        "\n## Bodies\n\nWhat the program knows worlds by, and where each figure is from; a sheet may hold bodies of \
         its own. “Common practice, no source” marks what is usually taken without a publication behind it. The \
         generic moon is chosen by the user, never guessed from the size of a raster.\n",
    );
    for body in Body::known() {
        text.push_str(&format!("\n### {}\n\n| figure | value | source |\n|---|---|---|\n", body.name));
        for (figure, value) in figures(&body) {
            let source = body.source(figure).unwrap_or_default();
            text.push_str(&format!("| {} | {value} | {source} |\n", name(figure)));
        }
    }
    text
}

fn name(figure: BodyFigure) -> &'static str {
    match figure {
        BodyFigure::Shape => "shape",
        BodyFigure::Gravity => "gravity",
        BodyFigure::Gas => "air",
    }
}

fn figures(body: &Body) -> Vec<(BodyFigure, String)> {
    let mut figures = vec![(BodyFigure::Shape, body.shape.in_words())];
    figures.extend(body.gravity.map(|g| (BodyFigure::Gravity, format!("{g} m/s²"))));
    figures.push((BodyFigure::Gas, body.air_in_words()));
    figures
}
