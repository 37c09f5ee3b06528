//! TIFF directories: the header, the chain of directories, and the values of their tags.
//!
//! Written here rather than taken from the `tiff` crate, whose decoder interprets the first image
//! before a limit can be set: it refuses files this program reads, and spends 32 bytes on every
//! entry of a tile table. The tests use that crate as an oracle.

use std::collections::BTreeMap;

use super::limits::Limits;
use super::source::Source;
use crate::files::error::{FileError, Spot};

/// Byte order and offset width of one file.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) struct Dialect {
    pub(super) big_endian: bool,
    pub(super) big_tiff: bool,
}

/// One entry: the field type, the count of values, and where their bytes lie.
#[derive(Clone, Copy, Debug)]
struct Entry {
    kind: u16,
    count: u64,
    /// File offset of the first value byte (inside the entry itself when they fit there).
    offset: u64,
}

/// One directory of tags.
#[derive(Clone, Debug)]
pub(super) struct Directory {
    /// Position in the order of reading, for messages.
    pub(super) index: usize,
    dialect: Dialect,
    entries: BTreeMap<u16, Entry>,
}

/// Reads the header: byte order, classic or big, and the offset of the first directory.
pub(super) fn header(source: &Source) -> Result<(Dialect, u64), FileError> {
    let damaged = |problem: &str| FileError::malformed(source.path(), Spot::Offset(0), problem);
    let head = source.read(0, 8)?;
    let big_endian = match &head[..2] {
        b"II" => false,
        b"MM" => true,
        _ => return Err(damaged("a TIFF file begins with “II” or “MM”")),
    };
    let narrow = Dialect { big_endian, big_tiff: false };
    match narrow.u16(&head[2..]) {
        42 => Ok((narrow, narrow.u32(&head[4..]).into())),
        43 if narrow.u16(&head[4..]) == 8 && narrow.u16(&head[6..]) == 0 => {
            let wide = Dialect { big_endian, big_tiff: true };
            Ok((wide, wide.u64(&source.read(8, 8)?)))
        }
        43 => Err(damaged("BigTIFF offsets are 8 bytes wide, this header says otherwise")),
        version => Err(damaged(&format!("the TIFF version is 42 or 43, here it is {version}"))),
    }
}

/// Follows the chain of directories from `first`. A chain that bites its tail is refused.
pub(super) fn chain(
    source: &Source,
    dialect: Dialect,
    first: u64,
    start_index: usize,
    limits: &Limits,
) -> Result<Vec<Directory>, FileError> {
    let mut found = Vec::new();
    let mut seen = std::collections::BTreeSet::new();
    let mut next = first;
    while next != 0 {
        if !seen.insert(next) {
            let problem = "the chain of directories leads back to this one";
            return Err(FileError::malformed(source.path(), Spot::Offset(next), problem));
        }
        let index = start_index + found.len();
        if index >= limits.directories {
            let (asked, limit) = (index as u64 + 1, limits.directories as u64);
            return Err(FileError::too_large(source.path(), "the number of directories", asked, limit));
        }
        let (directory, following) = Directory::read(source, dialect, next, index, limits)?;
        found.push(directory);
        next = following;
    }
    Ok(found)
}

impl Dialect {
    pub(super) fn u16(self, b: &[u8]) -> u16 {
        let b = [b[0], b[1]];
        if self.big_endian { u16::from_be_bytes(b) } else { u16::from_le_bytes(b) }
    }

    pub(super) fn u32(self, b: &[u8]) -> u32 {
        let b = [b[0], b[1], b[2], b[3]];
        if self.big_endian { u32::from_be_bytes(b) } else { u32::from_le_bytes(b) }
    }

    pub(super) fn u64(self, b: &[u8]) -> u64 {
        let b = [b[0], b[1], b[2], b[3], b[4], b[5], b[6], b[7]];
        if self.big_endian { u64::from_be_bytes(b) } else { u64::from_le_bytes(b) }
    }
}

/// Bytes of one value of a field type; `None` for a type this format does not know.
fn width(kind: u16) -> Option<u64> {
    match kind {
        1 | 2 | 6 | 7 => Some(1),
        3 | 8 => Some(2),
        4 | 9 | 11 | 13 => Some(4),
        5 | 10 | 12 | 16..=18 => Some(8),
        _ => None,
    }
}

impl Directory {
    fn read(
        source: &Source,
        dialect: Dialect,
        at: u64,
        index: usize,
        limits: &Limits,
    ) -> Result<(Self, u64), FileError> {
        let (count, head, stride, inline) = if dialect.big_tiff {
            (dialect.u64(&source.read(at, 8)?), 8, 20, 8)
        } else {
            (u64::from(dialect.u16(&source.read(at, 2)?)), 2, 12, 4)
        };
        if count > limits.entries as u64 {
            let limit = limits.entries as u64;
            return Err(FileError::too_large(source.path(), "the number of directory entries", count, limit));
        }
        let bytes = source.read(at + head, count as usize * stride + inline)?;
        let mut entries = BTreeMap::new();
        for (i, raw) in bytes.chunks_exact(stride).take(count as usize).enumerate() {
            let (tag, kind) = (dialect.u16(raw), dialect.u16(&raw[2..]));
            let value_at = at + head + (i * stride + stride - inline) as u64;
            let (count, pointer) = if dialect.big_tiff {
                (dialect.u64(&raw[4..]), dialect.u64(&raw[12..]))
            } else {
                (dialect.u32(&raw[4..]).into(), dialect.u32(&raw[8..]).into())
            };
            let fits = width(kind).and_then(|w| w.checked_mul(count)).is_some_and(|n| n <= inline as u64);
            let offset = if fits { value_at } else { pointer };
            // The first of two equal tags counts, as the format asks for ascending unique tags.
            entries.entry(tag).or_insert(Entry { kind, count, offset });
        }
        let tail = &bytes[count as usize * stride..];
        let next = if dialect.big_tiff { dialect.u64(tail) } else { dialect.u32(tail).into() };
        Ok((Self { index, dialect, entries }, next))
    }

    pub(super) fn has(&self, tag: u16) -> bool {
        self.entries.contains_key(&tag)
    }

    /// Where a tag of this directory stands, for messages.
    pub(super) fn spot(&self, tag: u16) -> Spot {
        Spot::Tag { directory: self.index, tag }
    }

    /// All values of a tag as unsigned numbers, or `None` when the tag is absent. At most
    /// `most` values are accepted.
    pub(super) fn unsigned(
        &self,
        source: &Source,
        tag: u16,
        most: usize,
    ) -> Result<Option<Vec<u64>>, FileError> {
        let Some((kind, bytes)) = self.bytes(source, tag, most)? else { return Ok(None) };
        let d = self.dialect;
        let values = match kind {
            1 | 7 => bytes.iter().map(|b| u64::from(*b)).collect(),
            3 => bytes.chunks_exact(2).map(|b| d.u16(b).into()).collect(),
            4 | 13 => bytes.chunks_exact(4).map(|b| d.u32(b).into()).collect(),
            16 | 18 => bytes.chunks_exact(8).map(|b| d.u64(b)).collect(),
            _ => return Err(self.wrong_type(source, tag, kind, "an unsigned integer")),
        };
        Ok(Some(values))
    }

    /// The first value of a tag as an unsigned number.
    pub(super) fn first(&self, source: &Source, tag: u16) -> Result<Option<u64>, FileError> {
        Ok(self.unsigned(source, tag, 1 << 16)?.and_then(|v| v.first().copied()))
    }

    /// The values of a tag as real numbers; empty when the tag is absent.
    pub(super) fn reals(&self, source: &Source, tag: u16, most: usize) -> Result<Vec<f64>, FileError> {
        let Some((kind, bytes)) = self.bytes(source, tag, most)? else { return Ok(Vec::new()) };
        let d = self.dialect;
        let values = match kind {
            11 => bytes.chunks_exact(4).map(|b| f32::from_bits(d.u32(b)).into()).collect(),
            12 => bytes.chunks_exact(8).map(|b| f64::from_bits(d.u64(b))).collect(),
            3 => bytes.chunks_exact(2).map(|b| d.u16(b).into()).collect(),
            4 => bytes.chunks_exact(4).map(|b| d.u32(b).into()).collect(),
            5 => bytes.chunks_exact(8).map(|b| f64::from(d.u32(b)) / f64::from(d.u32(&b[4..]))).collect(),
            _ => return Err(self.wrong_type(source, tag, kind, "a real number")),
        };
        Ok(values)
    }

    /// The text of a tag up to its first zero byte; bytes that are not UTF-8 become “�”.
    pub(super) fn text(&self, source: &Source, tag: u16, most: usize) -> Result<Option<String>, FileError> {
        let Some((kind, bytes)) = self.bytes(source, tag, most)? else { return Ok(None) };
        if !matches!(kind, 1 | 2 | 7) {
            return Err(self.wrong_type(source, tag, kind, "text"));
        }
        let end = bytes.iter().position(|b| *b == 0).unwrap_or(bytes.len());
        Ok(Some(String::from_utf8_lossy(&bytes[..end]).into_owned()))
    }

    /// The bytes of a tag of byte type, such as shared JPEG tables.
    pub(super) fn blob(&self, source: &Source, tag: u16, most: usize) -> Result<Option<Vec<u8>>, FileError> {
        let Some((kind, bytes)) = self.bytes(source, tag, most)? else { return Ok(None) };
        if !matches!(kind, 1 | 7) {
            return Err(self.wrong_type(source, tag, kind, "bytes"));
        }
        Ok(Some(bytes))
    }

    /// The field type and raw bytes of a tag. The count is checked against `most` and against the
    /// length of the file before anything is allocated.
    fn bytes(&self, source: &Source, tag: u16, most: usize) -> Result<Option<(u16, Vec<u8>)>, FileError> {
        let Some(entry) = self.entries.get(&tag) else { return Ok(None) };
        if entry.count > most as u64 {
            return Err(FileError::too_large(source.path(), "a tag's value count", entry.count, most as u64));
        }
        let Some(width) = width(entry.kind) else {
            let problem = format!("field type {} does not exist", entry.kind);
            return Err(FileError::malformed(source.path(), self.spot(tag), problem));
        };
        let total = width.checked_mul(entry.count).and_then(|n| usize::try_from(n).ok());
        let Some(total) = total else {
            let problem = format!("{} values do not fit in memory", entry.count);
            return Err(FileError::malformed(source.path(), self.spot(tag), problem));
        };
        Ok(Some((entry.kind, source.read(entry.offset, total)?)))
    }

    fn wrong_type(&self, source: &Source, tag: u16, kind: u16, expected: &str) -> FileError {
        let problem = format!("{expected} is expected, the field type is {kind}");
        FileError::malformed(source.path(), self.spot(tag), problem)
    }
}
