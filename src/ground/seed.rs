//! Random streams that depend on the sheet's seed and a label, never on threads or on time.

use rand_chacha::ChaCha8Rng;
use rand_chacha::rand_core::SeedableRng as _;
use serde::{Deserialize, Serialize};
use sha2::{Digest as _, Sha256};

/// The seed of a sheet. All random numbers of a run come from it.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(transparent)]
pub struct Seed(pub u64);

impl Seed {
    /// An independent stream for a purpose (`"axial.block-bootstrap"`) and an index within it
    /// (a replicate, a tile): the same for any number of threads and any order of calls.
    pub fn stream(self, label: &str, index: u64) -> ChaCha8Rng {
        let mut hash = Sha256::new();
        hash.update(self.0.to_le_bytes());
        hash.update(index.to_le_bytes());
        hash.update(label.as_bytes());
        ChaCha8Rng::from_seed(hash.finalize().into())
    }

    /// The seed of a part (a patch, a record), so that parts do not share streams.
    pub fn child(self, label: &str) -> Self {
        let mut hash = Sha256::new();
        hash.update(self.0.to_le_bytes());
        hash.update(label.as_bytes());
        let bytes: [u8; 32] = hash.finalize().into();
        let mut first = [0u8; 8];
        first.copy_from_slice(&bytes[..8]);
        Self(u64::from_le_bytes(first))
    }
}
