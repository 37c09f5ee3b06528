//! One stored image: its layout, and its chunks decoded on demand.

use std::cell::RefCell;
use std::sync::{Arc, Mutex};

use super::cache::ChunkCache;
use super::codec;
use super::layout::Layout;
use super::picture;
use super::source::Source;
use crate::files::error::FileError;

/// Where the chunks come from.
#[derive(Debug)]
enum Store {
    /// Strips or tiles of a TIFF file.
    Chunks,
    /// A picture that can only be decoded as a whole; kept once it is.
    Whole { kind: picture::Kind, decoded: Mutex<Option<Arc<Vec<u8>>>> },
}

#[derive(Debug)]
pub(super) struct Image {
    /// Distinct within one raster: the key of its chunks in the cache.
    id: usize,
    pub(super) layout: Layout,
    source: Arc<Source>,
    store: Store,
}

thread_local! {
    static STORED: RefCell<Vec<u8>> = const { RefCell::new(Vec::new()) };
}

impl Image {
    pub(super) fn chunked(id: usize, layout: Layout, source: Arc<Source>) -> Self {
        Self { id, layout, source, store: Store::Chunks }
    }

    pub(super) fn whole(layout: Layout, source: Arc<Source>, kind: picture::Kind) -> Self {
        Self { id: 0, layout, source, store: Store::Whole { kind, decoded: Mutex::new(None) } }
    }

    /// The unpacked samples of a chunk, or `None` for one that the writer left out.
    pub(super) fn chunk(&self, index: usize, cache: &ChunkCache) -> Result<Option<Arc<Vec<u8>>>, FileError> {
        match &self.store {
            Store::Whole { kind, decoded } => {
                let mut decoded = decoded.lock().unwrap_or_else(|poisoned| poisoned.into_inner());
                if let Some(bytes) = &*decoded {
                    return Ok(Some(bytes.clone()));
                }
                let bytes = Arc::new(picture::decode(&self.source, *kind, &self.layout)?);
                *decoded = Some(bytes.clone());
                Ok(Some(bytes))
            }
            Store::Chunks => {
                if let Some(bytes) = cache.get((self.id, index)) {
                    return Ok(Some(bytes));
                }
                let Some(bytes) = self.decode(index)? else { return Ok(None) };
                let bytes = Arc::new(bytes);
                cache.put((self.id, index), &bytes);
                Ok(Some(bytes))
            }
        }
    }

    fn decode(&self, index: usize) -> Result<Option<Vec<u8>>, FileError> {
        let layout = &self.layout;
        let (offset, count) = (layout.offsets[index], layout.counts[index]);
        if count == 0 {
            return Ok(None);
        }
        let damaged = |problem: String| FileError::malformed(self.source.path(), layout.spot(index), problem);
        if offset.checked_add(count).is_none_or(|end| end > self.source.len()) {
            let end = self.source.len();
            return Err(damaged(format!("the chunk has {count} bytes, but the file ends at byte {end}")));
        }
        let rows = layout.stored_rows(index % (layout.across() * layout.down()));
        // What lies past the pixels of an uncompressed chunk is padding.
        let most = match layout.compression {
            super::layout::Compression::None => {
                layout.row_bytes().map_or(count, |b| count.min((b * rows) as u64))
            }
            _ => count,
        };
        STORED.with_borrow_mut(|stored| {
            self.source.read_into(offset, most as usize, stored)?;
            let decoded = codec::decode(layout, stored, rows).map_err(damaged);
            // One huge strip must not hold its memory for ever.
            if stored.capacity() > 1 << 24 {
                *stored = Vec::new();
            }
            decoded.map(Some)
        })
    }
}
