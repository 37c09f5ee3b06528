//! The engine as a whole: guards, properties, hostile files, the command line.

mod docs;
mod guards;
mod plates;
mod gratings;
