//! Figures as PDF: one page of the figure's size, text selectable, the typeface embedded as a
//! subset.

use crate::plate::Figure;

use super::{WriteError, tree};

/// The figure as a one-page PDF. The same figure gives the same bytes.
///
/// # Errors
/// [`WriteError`]: no area, or the renderer's own words.
pub fn pdf(figure: &Figure) -> Result<Vec<u8>, WriteError> {
    let tree = tree(figure)?;
    let page = svg2pdf::PageOptions { dpi: 96.0 };
    svg2pdf::to_pdf(&tree, svg2pdf::ConversionOptions::default(), page)
        .map_err(|e| WriteError::Render(e.to_string()))
}
