//! The engine as a whole: guards, properties, hostile files, the command line.

mod coarse;
mod command_line;
mod demo;
mod docs;
mod gratings;
mod guards;
mod hostile;
mod image_channels;
mod jpeg_writer;
mod layouts;
mod netcdf;
mod netcdf_writer;
mod obstacle;
mod orientation;
mod plates;
mod records;
mod samples;
mod theories;
mod tiff_writer;
mod verdicts;
