//! How much a raster file may ask of the machine before it is refused.

/// Bounds checked before anything is allocated. The defaults suit a desktop machine with 8 GB.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Limits {
    /// Pixels of one `read` (the answer takes 4 to 5 bytes each).
    pub pixels_per_read: usize,
    /// Decoded bytes of one strip or tile, and of a whole PNG or JPEG image.
    pub chunk_bytes: usize,
    /// Directories followed in one TIFF file.
    pub directories: usize,
    /// Entries of one TIFF directory.
    pub entries: usize,
    /// Strips or tiles of one image.
    pub chunks: usize,
    /// Bytes of any other tag value.
    pub tag_bytes: usize,
    /// Samples per pixel.
    pub samples: usize,
    /// Decoded strips and tiles kept for the next read.
    pub cache_bytes: usize,
    /// Memory for the coarse levels that `build_coarse` makes.
    pub coarse_bytes: usize,
}

impl Default for Limits {
    fn default() -> Self {
        Self {
            pixels_per_read: 1 << 28,
            chunk_bytes: 1 << 30,
            directories: 1024,
            entries: 4096,
            chunks: 1 << 26,
            tag_bytes: 1 << 24,
            samples: 1024,
            cache_bytes: 192 << 20,
            coarse_bytes: 256 << 20,
        }
    }
}
