//! Reading a site file: size, JSON, forms, checks, in that order.

use std::fs::File;
use std::io::Read;
use std::path::Path;

use serde_json::Value;

use super::boards::{Context, boards};
use super::error::{SiteError, SiteWarning};
use super::feeds::{Fed, resolve};
use super::form::{SiteForm, WordsForm};
use super::known::Known;
use super::reader::Reader;
use super::rest;
use crate::quantity::{nearest, nearest_text};
use crate::site::model::{Phase, Site, WordSet};

/// The schema that is read.
pub const SCHEMA: &str = "straypath-site/1";

/// A file above this many bytes is refused before it is parsed.
pub const MOST_BYTES: u64 = 8 * 1024 * 1024;

/// A site as read from a file.
#[derive(Clone, Debug)]
pub struct LoadedFile {
    /// The checked site.
    pub site: Site,
    /// The document as given, for the log.
    pub given: Value,
    /// What was taken for granted.
    pub warnings: Vec<SiteWarning>,
}

/// Reads a site from a file of at most `MOST_BYTES`.
pub fn load_path(path: &Path, known: &Known) -> Result<LoadedFile, SiteError> {
    let shown = path.display().to_string();
    let unreadable = |e: std::io::Error| {
        let hint = match e.kind() {
            std::io::ErrorKind::NotFound => {
                "check the name; `straypath site new` writes a site file"
            }
            std::io::ErrorKind::PermissionDenied => "this user may not read it",
            _ => "name a readable file",
        };
        SiteError::new(
            shown.clone(),
            format!("the site file cannot be read: {e}"),
            hint,
        )
    };
    let file = File::open(path).map_err(unreadable)?;
    let meta = file.metadata().map_err(unreadable)?;
    if meta.is_dir() {
        return Err(SiteError::new(
            shown,
            "this is a folder, not a site file",
            "name the file in it",
        ));
    }
    if meta.len() > MOST_BYTES {
        return Err(too_large(&shown, meta.len()));
    }
    // A device or pipe tells no length, so reading stops by itself one byte past the limit.
    let mut bytes = Vec::new();
    file.take(MOST_BYTES + 1)
        .read_to_end(&mut bytes)
        .map_err(unreadable)?;
    let text = String::from_utf8(bytes).map_err(|e| {
        SiteError::new(
            shown.clone(),
            format!(
                "the site file is not UTF-8 text (byte {})",
                e.utf8_error().valid_up_to() + 1
            ),
            "save it as UTF-8",
        )
    })?;
    let given = parse(&text, &shown)?;
    let (site, warnings) = load_str(&text, known)?;
    Ok(LoadedFile {
        site,
        given,
        warnings,
    })
}

/// Reads a site from JSON text.
pub fn load_str(text: &str, known: &Known) -> Result<(Site, Vec<SiteWarning>), SiteError> {
    // The text itself is deserialized, not a `Value` of it: only so is a key given twice seen, and a line told.
    let text = checked(text, "the document")?;
    let mut json = serde_json::Deserializer::from_str(text);
    let form: SiteForm =
        serde_path_to_error::deserialize(&mut json).map_err(SiteError::from_serde)?;
    json.end().map_err(|e| SiteError::syntax(&e))?;
    convert(&form, known)
}

/// Reads a site from a JSON value.
pub fn load_value(value: Value, known: &Known) -> Result<(Site, Vec<SiteWarning>), SiteError> {
    let form: SiteForm = serde_path_to_error::deserialize(value).map_err(SiteError::from_serde)?;
    convert(&form, known)
}

fn too_large(place: &str, bytes: u64) -> SiteError {
    SiteError::new(
        place,
        format!("the site file has {bytes} bytes, above the limit of {MOST_BYTES}"),
        "a site of 1,000 circuits needs less than 1 MiB: check that this is a site file",
    )
}

fn checked<'t>(text: &'t str, place: &str) -> Result<&'t str, SiteError> {
    if text.len() as u64 > MOST_BYTES {
        return Err(too_large(place, text.len() as u64));
    }
    let text = text.trim_start_matches('\u{feff}');
    if text.trim().is_empty() {
        return Err(SiteError::new(
            place,
            "the site file is empty",
            "`straypath site new` writes one",
        ));
    }
    Ok(text)
}

fn parse(text: &str, place: &str) -> Result<Value, SiteError> {
    serde_json::from_str(checked(text, place)?).map_err(|e| SiteError::syntax(&e))
}

fn convert(form: &SiteForm, known: &Known) -> Result<(Site, Vec<SiteWarning>), SiteError> {
    if form.schema != SCHEMA {
        let hint = if form.schema.starts_with("straypath-site/") {
            format!("this program reads `{SCHEMA}`: use a newer one for that file")
        } else {
            format!("write \"schema\": \"{SCHEMA}\"")
        };
        return Err(SiteError::new(
            "schema",
            format!(
                "`{}` is not a schema read here",
                super::error::shorten(&form.schema)
            ),
            hint,
        ));
    }
    let mut reader = Reader::new(known);
    let name = reader.name("", form.name.as_ref(), "unnamed site")?;
    let supply = rest::supply(&mut reader, &form.supply)?;
    let feeds = resolve(&form.boards)?;
    let phase = if supply.phases == 3 {
        Phase::Three
    } else {
        Phase::One(1)
    };
    let context = Context {
        supply: phase,
        system: supply.system,
    };
    let mut all = boards(&mut reader, &form.boards, &feeds, context)?;
    // `resolve` left exactly one board on the service, and it comes before all that it feeds.
    let main_board = feeds
        .order
        .iter()
        .position(|i| matches!(feeds.fed[*i], Fed::Service))
        .unwrap_or(0);
    let (earthing, bonds) = rest::earthing(
        &mut reader,
        form.earthing.as_ref(),
        &all[main_board],
        &all,
        supply.system,
    )?;
    all[main_board].earthing = Some(earthing);
    let points = rest::point_index(&all);
    let equipment = rest::equipment(
        &mut reader,
        form.equipment.as_deref().unwrap_or(&[]),
        &points,
        &bonds,
    )?;
    let sources = rest::sources(
        &mut reader,
        form.sources.as_deref().unwrap_or(&[]),
        &all,
        &points,
    )?;
    rules(&mut reader, form.rules.as_deref());
    let site = Site {
        name,
        words: match form.words {
            Some(WordsForm::AuNz) => WordSet::AuNz,
            Some(WordsForm::Iec) | None => WordSet::Iec,
        },
        rules: form.rules.clone(),
        may_isolate_supply: form.may_isolate_supply.unwrap_or(false),
        supply,
        main_board,
        boards: all,
        bonds,
        equipment,
        sources,
    };
    Ok((site, reader.finish()))
}

fn rules(reader: &mut Reader<'_>, rules: Option<&str>) {
    let Some(rules) = rules else { return };
    if reader.known.rules.is_empty() || reader.known.rules.contains(rules) {
        return;
    }
    let near = nearest(rules, &reader.known.rules, 3);
    let tail = if near.is_empty() {
        String::new()
    } else {
        format!("; {}", nearest_text(&near))
    };
    let text = format!(
        "no rule set `{}` is known here: the widest limits are shown{tail}",
        super::error::shorten(rules)
    );
    reader.warn("rules", text);
}
