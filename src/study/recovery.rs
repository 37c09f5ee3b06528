//! Injection and recovery: synthetic bedforms of known trend are laid into a patch's own texture under its own light
//! and sought again, so that one knows what would have been seen there and what would not.

use crate::ground::{Stopped, Work};

use super::{OpenRaster, Patch, PatchFinding, RasterEntry, RecoveryFinding, Sheet};

/// Lays bedforms into the texture of a measured patch and seeks them again; in words why that cannot be done.
///
/// # Errors
/// [`Stopped`].
pub fn recovery(
    sheet: &Sheet,
    patch: &Patch,
    entry: &RasterEntry,
    open: &OpenRaster,
    finding: &PatchFinding,
    work: &Work,
) -> Result<Result<RecoveryFinding, String>, Stopped> {
    let _ = (sheet, patch, entry, open, finding);
    work.advance(0)?;
    Ok(Err("bedforms cannot be laid in yet".into()))
}
