//! The words of the command line.

use std::path::PathBuf;

use clap::{Args, Parser, Subcommand};

/// Reads landscapes that wind and water carved: bedform trend and spacing, and the winds that would make them.
///
/// Without a command the window opens, on SHEET when one is given.
#[derive(Debug, Parser)]
#[command(name = "ventifact", version, args_conflicts_with_subcommands = true)]
pub struct Arguments {
    #[command(subcommand)]
    pub command: Option<Command>,
    /// A sheet (NAME.sheet.json) to open in the window.
    pub sheet: Option<PathBuf>,
}

#[derive(Debug, Subcommand)]
pub enum Command {
    /// Make the invented ground of Sorrel Reach, measure and judge it, write plates, tables and findings
    Demo {
        /// Folder to write to; made when absent.
        #[arg(long, default_value = "ventifact-demo")]
        out: PathBuf,
        /// Do not open the window afterwards.
        #[arg(long)]
        no_window: bool,
    },
    /// Say what a raster file is: size, samples, bands, place, and what is wrong with it
    Look {
        raster: PathBuf,
        /// Print as JSON.
        #[arg(long)]
        json: bool,
    },
    /// Study one raster quickly; writes findings, plates and a sheet
    Measure(Measure),
    /// Compute everything a sheet asks for
    Run {
        sheet: PathBuf,
        /// Folder to write to; beside the sheet when absent.
        #[arg(long)]
        out: Option<PathBuf>,
    },
    /// Name all problems of a sheet at once, computing nothing
    Check { sheet: PathBuf },
    /// Print what is computed, and from which source
    Methods {
        /// Print the sources as BibTeX instead.
        #[arg(long)]
        bibtex: bool,
    },
}

#[derive(Debug, Args)]
pub struct Measure {
    pub raster: PathBuf,
    /// Patches as GeoPackage or GeoJSON (foreign member "frame": "lonlat", "map" or "pixel"); the whole
    /// valid raster is one patch when absent.
    #[arg(long, value_name = "FILE")]
    pub patches: Option<PathBuf>,
    /// Crest lines of your own as GeoPackage or GeoJSON line strings ("frame" as for patches), beside those that are
    /// traced in each patch.
    #[arg(long, value_name = "FILE")]
    pub crests: Option<PathBuf>,
    /// Only the lines of --crests count: nothing is traced.
    #[arg(long, requires = "crests")]
    pub crests_only: bool,
    /// A wind record: a text table as time series, or sectors by speed classes.
    #[arg(long, value_name = "FILE")]
    pub winds: Option<PathBuf>,
    /// Ground size of a pixel in metres, for rasters that do not say.
    #[arg(long, value_name = "M")]
    pub pixel_size: Option<f64>,
    /// Azimuth of image-up in degrees, for rasters without georeference.
    #[arg(long, value_name = "DEG")]
    pub north: Option<f64>,
    /// Radar with speckle: the logarithm is measured.
    #[arg(long)]
    pub radar: bool,
    /// Where the radar looks from or the sun stands, azimuth in degrees.
    #[arg(long, value_name = "DEG")]
    pub light_from: Option<f64>,
    /// Band to measure, from 1.
    #[arg(long, value_name = "N")]
    pub band: Option<usize>,
    /// Folder to write to.
    #[arg(long, default_value = "ventifact-out")]
    pub out: PathBuf,
}
