//! The alignment family.

use crate::ground::Method;

/// The methods of this family.
pub const METHODS: &[&Method] = &[];
