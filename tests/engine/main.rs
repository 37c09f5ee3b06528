//! The engine as a whole: guards, properties, hostile files, the command line.

mod guards;
mod plates;
