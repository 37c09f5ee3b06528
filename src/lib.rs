//! Ventifact reads landscapes that wind and water carved: bedform trend and spacing, the winds that
//! would make them, channels and their arrangement, each with an interval that survives review.
//!
//! The house is built in floors; a floor names only those above it in this list. `DEVELOPERS.md`
//! holds the table, and a test keeps the code to it.

pub mod desk;
pub mod files;
pub mod ground;
pub mod headless;
pub mod numeric;
pub mod plate;
pub mod science;
pub mod study;
#[cfg(feature = "window")]
pub mod window;

/// Asserts that two numbers agree, and on failure prints got, want, error and bound.
#[doc(hidden)]
#[macro_export]
macro_rules! assert_close {
    ($got:expr, $want:expr, $bound:expr) => {
        $crate::assert_close!($got, $want, $bound, "")
    };
    ($got:expr, $want:expr, $bound:expr, $($what:tt)+) => {{
        let (got, want, bound): (f64, f64, f64) = ($got, $want, $bound);
        let error = (got - want).abs();
        assert!(error <= bound, "{}: got {got}, want {want}, error {error:e}, bound {bound:e}", format_args!($($what)+));
    }};
}
