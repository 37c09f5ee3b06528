//! The header of a classic file, every count held against the bytes that are there.

use std::fs::File;
use std::io::{BufReader, Read as _};
use std::path::Path;

use crate::files::error::{FileError, Spot};

use super::{Netcdf, Signature, signature};

/// A dimension.
#[derive(Clone, Debug, PartialEq)]
pub struct Dimension {
    pub name: String,
    /// 0 for the record dimension.
    pub length: u64,
    pub is_record: bool,
}

/// An attribute of the file or of a variable.
#[derive(Clone, Debug, PartialEq)]
pub struct Attribute {
    pub name: String,
    pub value: AttributeValue,
}

#[derive(Clone, Debug, PartialEq)]
pub enum AttributeValue {
    Text(String),
    Numbers(Vec<f64>),
}

/// A variable: where its values lie and what they are.
#[derive(Clone, Debug, PartialEq)]
pub struct Variable {
    pub name: String,
    /// Indices of the dimensions, slowest first.
    pub dimensions: Vec<usize>,
    pub attributes: Vec<Attribute>,
    pub kind: Kind,
    /// Whether the first dimension is the record dimension.
    pub is_record: bool,
    /// Byte of the first value.
    pub begin: u64,
}

/// The type of the stored numbers.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Kind {
    Byte,
    Char,
    Short,
    Int,
    Float,
    Double,
    UByte,
    UShort,
    UInt,
    Int64,
    UInt64,
}

/// Real headers hold some thousand bytes; the limit also bounds what a damaged one can ask for.
const HEADER_LIMIT: u64 = 1 << 24;
/// Dimensions of one variable.
const MOST_DIMENSIONS: u64 = 64;

const DIMENSION: u32 = 0x0A;
const VARIABLE: u32 = 0x0B;
const ATTRIBUTE: u32 = 0x0C;
/// Record count of a file that was cut off while it was being written.
const STREAMING: u64 = u32::MAX as u64;

const HDF5_ADVICE: &str = "NetCDF-4 is HDF5 inside: save the file as NetCDF classic (64-bit offset), or as a CSV \
                           table of lat, lon, time, u, v, as docs/winds.md shows";

impl Kind {
    fn of(code: u32, wide: bool) -> Option<Self> {
        Some(match code {
            1 => Self::Byte,
            2 => Self::Char,
            3 => Self::Short,
            4 => Self::Int,
            5 => Self::Float,
            6 => Self::Double,
            7 if wide => Self::UByte,
            8 if wide => Self::UShort,
            9 if wide => Self::UInt,
            10 if wide => Self::Int64,
            11 if wide => Self::UInt64,
            _ => return None,
        })
    }

    pub fn bytes(self) -> u64 {
        match self {
            Self::Byte | Self::Char | Self::UByte => 1,
            Self::Short | Self::UShort => 2,
            Self::Int | Self::Float | Self::UInt => 4,
            Self::Double | Self::Int64 | Self::UInt64 => 8,
        }
    }

    /// The number in the first bytes of `raw`, which holds at least [`Self::bytes`].
    pub fn number(self, raw: &[u8]) -> f64 {
        fn array<const N: usize>(raw: &[u8]) -> [u8; N] {
            let mut out = [0; N];
            out.copy_from_slice(&raw[..N]);
            out
        }
        match self {
            Self::Byte => f64::from(raw[0] as i8),
            Self::Char | Self::UByte => f64::from(raw[0]),
            Self::Short => f64::from(i16::from_be_bytes(array(raw))),
            Self::UShort => f64::from(u16::from_be_bytes(array(raw))),
            Self::Int => f64::from(i32::from_be_bytes(array(raw))),
            Self::UInt => f64::from(u32::from_be_bytes(array(raw))),
            Self::Float => f64::from(f32::from_be_bytes(array(raw))),
            Self::Double => f64::from_be_bytes(array(raw)),
            Self::Int64 => i64::from_be_bytes(array(raw)) as f64,
            Self::UInt64 => u64::from_be_bytes(array(raw)) as f64,
        }
    }

    /// What the standard puts where nothing was written; `None` for bytes, which use all their values.
    pub fn default_fill(self) -> Option<f64> {
        match self {
            Self::Byte | Self::Char | Self::UByte => None,
            Self::Short => Some(-32_767.0),
            Self::UShort => Some(65_535.0),
            Self::Int => Some(-2_147_483_647.0),
            Self::UInt => Some(4_294_967_295.0),
            Self::Float | Self::Double => Some(9.969_209_968_386_869e36),
            Self::Int64 => Some(-9_223_372_036_854_775_806i64 as f64),
            Self::UInt64 => Some(u64::MAX as f64 - 1.0),
        }
    }
}

impl Variable {
    /// A text attribute, without the padding some writers leave.
    pub fn text(&self, name: &str) -> Option<&str> {
        self.attributes.iter().find(|a| a.name == name).and_then(|a| match &a.value {
            AttributeValue::Text(text) => Some(text.trim_end_matches('\0').trim()),
            AttributeValue::Numbers(_) => None,
        })
    }

    /// The numbers of an attribute; none when it is absent or text.
    pub fn numbers(&self, name: &str) -> &[f64] {
        self.attributes
            .iter()
            .find(|a| a.name == name)
            .and_then(|a| match &a.value {
                AttributeValue::Numbers(numbers) => Some(numbers.as_slice()),
                AttributeValue::Text(_) => None,
            })
            .unwrap_or(&[])
    }
}

/// The header and the bytes that are left for it.
struct Reader<'a> {
    path: &'a Path,
    file: BufReader<File>,
    at: u64,
    end: u64,
    /// CDF-5: counts of 8 bytes.
    wide_counts: bool,
    /// CDF-2 and CDF-5: offsets of 8 bytes.
    wide_offsets: bool,
}

pub(super) fn read(path: &Path, file: BufReader<File>, bytes: u64) -> Result<Netcdf, FileError> {
    let end = bytes.min(HEADER_LIMIT);
    let mut reader = Reader { path, file, at: 0, end, wide_counts: false, wide_offsets: false };
    let head = reader.take(bytes.min(8))?;
    match signature(&head) {
        Some(Signature::Classic) => {}
        Some(Signature::Hdf5) => {
            return Err(FileError::unsupported(path, Spot::File, "NetCDF-4 (HDF5)", HDF5_ADVICE));
        }
        None => return Err(reader.wrong("a classic NetCDF file begins with CDF and 1, 2 or 5")),
    }
    if head.len() < 8 {
        return Err(reader.short(8));
    }
    reader.wide_counts = head[3] == 5;
    reader.wide_offsets = head[3] != 1;
    let mut records = u64::from(u32::from_be_bytes([head[4], head[5], head[6], head[7]]));
    let mut streaming = records == STREAMING;
    if reader.wide_counts {
        let low = reader.word()?;
        streaming = records == STREAMING && u64::from(low) == STREAMING;
        records = records << 32 | u64::from(low);
    }
    let dimensions = reader.list(DIMENSION, "dimensions", Reader::dimension)?;
    if dimensions.iter().filter(|d| d.is_record).count() > 1 {
        return Err(reader.wrong("more than one dimension has length 0, which marks the record dimension"));
    }
    let attributes = reader.list(ATTRIBUTE, "attributes", Reader::attribute)?;
    let variables = reader.list(VARIABLE, "variables", |r| r.variable(&dimensions))?;
    let Reader { file, .. } = reader;
    let mut found = Netcdf {
        path: path.to_owned(),
        file,
        bytes,
        dimensions,
        attributes,
        variables,
        records: if streaming { 0 } else { records },
        record_bytes: 0,
    };
    found.lay_records()?;
    if streaming {
        let first = found.variables.iter().filter(|v| v.is_record).map(|v| v.begin).min();
        let room = first.map_or(0, |first| bytes.saturating_sub(first));
        found.records = room.checked_div(found.record_bytes).unwrap_or(0);
    }
    Ok(found)
}

impl Netcdf {
    /// Bytes from record to record: the record variables' shares, each padded to four bytes unless there
    /// is only one.
    fn lay_records(&mut self) -> Result<(), FileError> {
        let mut shares = Vec::new();
        for variable in self.variables.iter().filter(|v| v.is_record) {
            let mut cells = variable.dimensions.iter().skip(1);
            let count = cells.try_fold(1u64, |n, d| n.checked_mul(self.dimensions[*d].length));
            let share = count.and_then(|n| n.checked_mul(variable.kind.bytes()));
            shares.push(share.ok_or_else(|| {
                self.malformed(
                    variable.begin,
                    format!("the variable “{}” is larger than any file", variable.name),
                )
            })?);
        }
        self.record_bytes = match shares.as_slice() {
            [one] => *one,
            many => {
                let padded = many.iter().map(|s| s.checked_next_multiple_of(4));
                let sum = padded.into_iter().try_fold(0u64, |sum, share| sum.checked_add(share?));
                sum.ok_or_else(|| self.malformed(0, "a record is larger than any file"))?
            }
        };
        Ok(())
    }
}

impl Reader<'_> {
    fn wrong(&self, problem: impl Into<String>) -> FileError {
        FileError::malformed(self.path, Spot::Offset(self.at), problem)
    }

    fn short(&self, wanted: u64) -> FileError {
        if self.end == HEADER_LIMIT {
            return FileError::too_large(
                self.path,
                "the header",
                self.at.saturating_add(wanted),
                HEADER_LIMIT,
            );
        }
        self.wrong(format!(
            "the header needs {wanted} more bytes, but the file ends after {}",
            self.end - self.at
        ))
    }

    /// Bytes, asked for only when they are there.
    fn take(&mut self, count: u64) -> Result<Vec<u8>, FileError> {
        if count > self.end - self.at {
            return Err(self.short(count));
        }
        let mut raw = vec![0; count as usize];
        self.file.read_exact(&mut raw).map_err(|e| FileError::io(self.path, "reading the header", e))?;
        self.at += count;
        Ok(raw)
    }

    fn word(&mut self) -> Result<u32, FileError> {
        let raw = self.take(4)?;
        Ok(u32::from_be_bytes([raw[0], raw[1], raw[2], raw[3]]))
    }

    /// A count or length that is never negative.
    fn count(&mut self) -> Result<u64, FileError> {
        let high = if self.wide_counts { self.word()? } else { 0 };
        let low = self.word()?;
        let value = u64::from(high) << 32 | u64::from(low);
        let limit = if self.wide_counts { i64::MAX as u64 } else { i32::MAX as u64 };
        if value > limit {
            return Err(self.wrong(format!("a count is negative ({value:#x})")));
        }
        Ok(value)
    }

    /// Values padded to four bytes.
    fn padded(&mut self, count: u64) -> Result<Vec<u8>, FileError> {
        let whole = count.checked_next_multiple_of(4).ok_or_else(|| self.short(count))?;
        let mut raw = self.take(whole)?;
        raw.truncate(count as usize);
        Ok(raw)
    }

    fn name(&mut self) -> Result<String, FileError> {
        let length = self.count()?;
        let raw = self.padded(length)?;
        Ok(String::from_utf8_lossy(&raw).into_owned())
    }

    /// A tagged list. Every element takes bytes, so a false count ends at the end of the header.
    fn list<T>(
        &mut self,
        tag: u32,
        what: &str,
        mut element: impl FnMut(&mut Self) -> Result<T, FileError>,
    ) -> Result<Vec<T>, FileError> {
        let found = self.word()?;
        let count = self.count()?;
        if found == 0 && count == 0 {
            return Ok(Vec::new());
        }
        if found != tag {
            return Err(self.wrong(format!("the list of {what} begins with {found:#x} instead of {tag:#x}")));
        }
        let mut list = Vec::new();
        for _ in 0..count {
            list.push(element(self)?);
        }
        Ok(list)
    }

    fn dimension(&mut self) -> Result<Dimension, FileError> {
        let name = self.name()?;
        let length = self.count()?;
        Ok(Dimension { name, length, is_record: length == 0 })
    }

    fn kind(&mut self) -> Result<Kind, FileError> {
        let code = self.word()?;
        Kind::of(code, self.wide_counts).ok_or_else(|| self.wrong(format!("there is no number type {code}")))
    }

    fn attribute(&mut self) -> Result<Attribute, FileError> {
        let name = self.name()?;
        let kind = self.kind()?;
        let count = self.count()?;
        let bytes = count.checked_mul(kind.bytes()).ok_or_else(|| self.short(count))?;
        let raw = self.padded(bytes)?;
        let value = if kind == Kind::Char {
            AttributeValue::Text(String::from_utf8_lossy(&raw).into_owned())
        } else {
            AttributeValue::Numbers(raw.chunks_exact(kind.bytes() as usize).map(|c| kind.number(c)).collect())
        };
        Ok(Attribute { name, value })
    }

    fn variable(&mut self, dimensions: &[Dimension]) -> Result<Variable, FileError> {
        let name = self.name()?;
        let rank = self.count()?;
        if rank > MOST_DIMENSIONS {
            return Err(
                self.wrong(format!("“{name}” has {rank} dimensions; at most {MOST_DIMENSIONS} are read"))
            );
        }
        let mut own = Vec::new();
        for place in 0..rank {
            let id = self.count()?;
            match dimensions.get(usize::try_from(id).unwrap_or(usize::MAX)) {
                Some(d) if d.is_record && place > 0 => {
                    return Err(
                        self.wrong(format!("“{name}” has the record dimension in place {place}, not first"))
                    );
                }
                Some(_) => own.push(id as usize),
                None => {
                    return Err(self.wrong(format!("“{name}” names dimension {id} of {}", dimensions.len())));
                }
            }
        }
        let attributes = self.list(ATTRIBUTE, "attributes", Self::attribute)?;
        let kind = self.kind()?;
        // The stored size may overflow in large files and is not needed.
        let _size = if self.wide_counts { self.take(8)? } else { self.take(4)? };
        let high = if self.wide_offsets { self.word()? } else { 0 };
        let begin = u64::from(high) << 32 | u64::from(self.word()?);
        let is_record = own.first().is_some_and(|d| dimensions[*d].is_record);
        Ok(Variable { name, dimensions: own, attributes, kind, is_record, begin })
    }
}
