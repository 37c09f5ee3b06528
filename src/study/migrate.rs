//! Sheets of earlier formats brought up to the present one, a step a format, on the plain JSON before
//! it is given types.

use serde_json::{Value, json};

/// One step for each earlier format: `STEPS[0]` turns format 1 into format 2.
const STEPS: [fn(&mut Value); 1] = [more_winds_and_theories];

/// Brings a sheet file of `format` (1 or later) up to the present format. What a step does not know
/// stays, so that it is refused later with its path.
pub fn migrate(file: &mut Value, format: u64) {
    let behind = usize::try_from(format).unwrap_or(usize::MAX).saturating_sub(1);
    for step in STEPS.iter().skip(behind) {
        step(file);
    }
    file["format"] = json!(super::sheet_file::FORMAT);
}

/// Format 2. Patches may be judged by several records: `"wind": 7` becomes `"winds": { "chosen": [7] }`;
/// without it all records judge, as before. Priors have names: weights the user had changed are kept, the
/// theories that are new get their defaults.
fn more_winds_and_theories(file: &mut Value) {
    if let Some(priors) = file.pointer_mut("/sheet/settings/verdict/priors")
        && let Some([transverse, along, gross_normal, random]) = priors.as_array().map(Vec::as_slice)
    {
        *priors = json!({
            "transverse": transverse, "along": along, "gross_normal": gross_normal, "random": random,
        });
    }
    let patches = file.pointer_mut("/sheet/patches").and_then(Value::as_array_mut);
    for patch in patches.into_iter().flatten().filter_map(Value::as_object_mut) {
        if let Some(wind) = patch.remove("wind").filter(|wind| !wind.is_null()) {
            patch.insert("winds".into(), json!({ "chosen": [wind] }));
        }
    }
}

#[cfg(test)]
mod tests {
    use super::super::sheet_file::{FORMAT, SheetFile, SheetFileError};
    use super::super::{Id, WindChoice};
    use super::STEPS;
    use std::path::Path;

    /// A sheet as the first version of the program wrote it.
    const FORMAT_1: &str = r#"{
  "format": 1,
  "sheet": {
    "title": "Old",
    "seed": 1,
    "settings": { "verdict": { "priors": [1.0, 2.0, 1.0, 0.5] } },
    "patches": [
      { "id": 2, "name": "a", "raster": 1, "outline": { "outer": [[0.0, 0.0]], "holes": [] }, "wind": 7 },
      { "id": 3, "name": "b", "raster": 1, "outline": { "outer": [[0.1, 0.0]], "holes": [] } },
      { "id": 4, "name": "c", "raster": 1, "outline": { "outer": [[0.2, 0.0]], "holes": [] }, "wind": null }
    ]
  }
}"#;

    #[test]
    fn there_is_a_step_for_every_earlier_format() {
        assert_eq!(STEPS.len() as u32, FORMAT - 1);
    }

    #[test]
    fn a_sheet_of_format_1_still_reads() {
        let file = SheetFile::parse(FORMAT_1, Path::new("")).expect("the old sheet reads");
        assert_eq!(file.format, FORMAT);
        let winds: Vec<_> = file.sheet.patches.iter().map(|p| p.winds.clone()).collect();
        assert_eq!(winds, [WindChoice::Chosen(vec![Id(7)]), WindChoice::All, WindChoice::All]);
        let priors = &file.sheet.settings.verdict.priors;
        assert_eq!((priors.along, priors.random, priors.fingering), (2.0, 0.5, 1.0));
        let again =
            SheetFile::parse(&file.render(Path::new("")), Path::new("")).expect("what was written reads");
        assert_eq!(again, file);
    }

    #[test]
    fn an_old_sheet_is_refused_by_the_path_of_what_is_wrong_and_a_new_one_does_not_take_old_fields() {
        let bent = FORMAT_1.replace("\"wind\": 7", "\"wind\": \"seven\"");
        let error = SheetFile::parse(&bent, Path::new("")).expect_err("refused");
        let SheetFileError::Malformed { path, .. } = &error else { panic!("{error}") };
        assert!(path.starts_with("sheet.patches[0].winds"), "{path}");
        assert!(error.to_string().contains("brought up from format 1"), "{error}");
        let mixed = FORMAT_1.replace("\"format\": 1", "\"format\": 2");
        let error = SheetFile::parse(&mixed, Path::new("")).expect_err("refused").to_string();
        assert!(error.contains("unknown field `wind`"), "{error}");
    }
}
