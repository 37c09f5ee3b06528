//! Writes classic NetCDF files for tests: written from the format's description, apart from the reader.

/// The stored numbers of a variable or attribute.
#[derive(Clone)]
pub enum Numbers {
    Text(String),
    Shorts(Vec<i16>),
    Ints(Vec<i32>),
    Floats(Vec<f32>),
    Doubles(Vec<f64>),
}

pub struct Var {
    pub name: &'static str,
    pub dims: Vec<usize>,
    pub attributes: Vec<(&'static str, Numbers)>,
    pub values: Numbers,
}

/// A whole file; a dimension of length 0 is the record dimension, `records` long.
pub struct Layout {
    pub version: u8,
    pub records: usize,
    pub dims: Vec<(&'static str, usize)>,
    pub vars: Vec<Var>,
}

impl Numbers {
    fn code(&self) -> u32 {
        match self {
            Self::Text(_) => 2,
            Self::Shorts(_) => 3,
            Self::Ints(_) => 4,
            Self::Floats(_) => 5,
            Self::Doubles(_) => 6,
        }
    }

    fn bytes(&self) -> Vec<u8> {
        match self {
            Self::Text(text) => text.bytes().collect(),
            Self::Shorts(v) => v.iter().flat_map(|x| x.to_be_bytes()).collect(),
            Self::Ints(v) => v.iter().flat_map(|x| x.to_be_bytes()).collect(),
            Self::Floats(v) => v.iter().flat_map(|x| x.to_be_bytes()).collect(),
            Self::Doubles(v) => v.iter().flat_map(|x| x.to_be_bytes()).collect(),
        }
    }

    fn len(&self) -> usize {
        self.bytes().len() / [1, 1, 2, 4, 4, 8][self.code() as usize - 1]
    }
}

pub fn text(value: &str) -> Numbers {
    Numbers::Text(value.into())
}

struct Out {
    version: u8,
    bytes: Vec<u8>,
}

impl Out {
    fn word(&mut self, value: u32) {
        self.bytes.extend(value.to_be_bytes());
    }

    fn count(&mut self, value: usize) {
        if self.version == 5 {
            self.bytes.extend((value as u64).to_be_bytes());
        } else {
            self.word(value as u32);
        }
    }

    fn padded(&mut self, raw: &[u8]) {
        self.bytes.extend(raw);
        while !self.bytes.len().is_multiple_of(4) {
            self.bytes.push(0);
        }
    }

    fn name(&mut self, name: &str) {
        self.count(name.len());
        self.padded(name.as_bytes());
    }

    fn tag(&mut self, tag: u32, count: usize) {
        self.word(if count == 0 { 0 } else { tag });
        self.count(count);
    }

    fn attributes(&mut self, list: &[(&'static str, Numbers)]) {
        self.tag(0x0C, list.len());
        for (name, value) in list {
            self.name(name);
            self.word(value.code());
            self.count(value.len());
            self.padded(&value.bytes());
        }
    }
}

impl Layout {
    pub fn bytes(&self) -> Vec<u8> {
        // Offsets have a fixed width, so a first pass finds where the values begin.
        let header = self.header(&vec![0; self.vars.len()]).len();
        let is_record = |var: &Var| var.dims.first().is_some_and(|d| self.dims[*d].1 == 0);
        let padded = |n: usize| n.next_multiple_of(4);
        let share = |var: &Var| var.values.bytes().len() / self.records.max(1);
        let recorded: Vec<&Var> = self.vars.iter().filter(|v| is_record(v)).collect();
        let lone = recorded.len() == 1;
        let step = |var: &Var| if lone { share(var) } else { padded(share(var)) };
        let (mut begins, mut at) = (vec![0; self.vars.len()], header);
        for (begin, var) in begins.iter_mut().zip(&self.vars).filter(|(_, v)| !is_record(v)) {
            *begin = at;
            at += padded(var.values.bytes().len());
        }
        for (begin, var) in begins.iter_mut().zip(&self.vars).filter(|(_, v)| is_record(v)) {
            *begin = at;
            at += step(var);
        }
        let mut out = Out { version: self.version, bytes: self.header(&begins) };
        for var in self.vars.iter().filter(|v| !is_record(v)) {
            out.padded(&var.values.bytes());
        }
        let data: Vec<(Vec<u8>, usize, usize)> =
            recorded.iter().map(|v| (v.values.bytes(), share(v), step(v))).collect();
        for record in 0..self.records {
            for (bytes, share, step) in &data {
                let part = &bytes[record * share..(record + 1) * share];
                out.bytes.extend(part);
                out.bytes.extend(std::iter::repeat_n(0, step - share));
            }
        }
        out.bytes
    }

    fn header(&self, begins: &[usize]) -> Vec<u8> {
        let mut out = Out { version: self.version, bytes: vec![b'C', b'D', b'F', self.version] };
        out.count(self.records);
        out.tag(0x0A, self.dims.len());
        for (name, length) in &self.dims {
            out.name(name);
            out.count(*length);
        }
        out.attributes(&[("title", text("made for a test"))]);
        out.tag(0x0B, self.vars.len());
        for (var, begin) in self.vars.iter().zip(begins) {
            out.name(var.name);
            out.count(var.dims.len());
            var.dims.iter().for_each(|d| out.count(*d));
            out.attributes(&var.attributes);
            out.word(var.values.code());
            out.count(var.values.bytes().len().next_multiple_of(4));
            if self.version == 1 {
                out.word(*begin as u32);
            } else {
                out.bytes.extend((*begin as u64).to_be_bytes());
            }
        }
        out.bytes
    }
}

/// Hourly winds of a grid, `lats` × `lons`, packed in shorts; the wind of cell (i, j) at time t is
/// `wind(t, i, j)`, m s⁻¹ toward east and north.
pub fn grid(
    version: u8,
    recorded: bool,
    times: usize,
    lats: &[f32],
    lons: &[f32],
    wind: impl Fn(usize, usize, usize) -> (f64, f64),
) -> Layout {
    let pack = |x: f64| ((x - 1.0) / 0.002).round() as i16;
    let (mut u, mut v) = (Vec::new(), Vec::new());
    for t in 0..times {
        for i in 0..lats.len() {
            for j in 0..lons.len() {
                let (east, north) = wind(t, i, j);
                u.push(if east.is_nan() { -32_767 } else { pack(east) });
                v.push(if north.is_nan() { -32_767 } else { pack(north) });
            }
        }
    }
    let packed = |name, standard, values| Var {
        name,
        dims: vec![0, 1, 2],
        attributes: vec![
            ("units", text("m s**-1")),
            ("standard_name", text(standard)),
            ("scale_factor", Numbers::Doubles(vec![0.002])),
            ("add_offset", Numbers::Doubles(vec![1.0])),
            ("_FillValue", Numbers::Shorts(vec![-32_767])),
        ],
        values: Numbers::Shorts(values),
    };
    let along = |name, dim, units, values: &[f32]| Var {
        name,
        dims: vec![dim],
        attributes: vec![("units", text(units))],
        values: Numbers::Floats(values.to_vec()),
    };
    Layout {
        version,
        records: if recorded { times } else { 0 },
        dims: vec![
            ("time", if recorded { 0 } else { times }),
            ("latitude", lats.len()),
            ("longitude", lons.len()),
        ],
        vars: vec![
            along("longitude", 2, "degrees_east", lons),
            along("latitude", 1, "degrees_north", lats),
            Var {
                name: "time",
                dims: vec![0],
                attributes: vec![
                    ("units", text("hours since 2001-01-01 00:00:00.0")),
                    ("calendar", text("gregorian")),
                ],
                values: Numbers::Ints((0..times as i32).collect()),
            },
            packed("u10", "eastward_wind", u),
            packed("v10", "northward_wind", v),
        ],
    }
}
