//! The engine as a whole: guards, properties, hostile files, the command line.

mod channels;
mod coarse;
mod command_line;
mod demo;
mod docs;
mod drainage;
mod dry_channels;
mod gratings;
mod guards;
mod hostile;
mod jpeg_writer;
mod layouts;
mod netcdf;
mod netcdf_writer;
mod network_commands;
mod obstacle;
mod orientation;
mod pen;
mod plates;
mod reach_channels;
mod records;
mod samples;
mod smoothness;
mod theories;
mod tiff_writer;
mod verdicts;
