//! What the typesetter may see: the filled template, the shared Typst files of the template set and
//! the shipped fonts. In: a source text. Out: pages, then PDF bytes. Reads no disk, no net, no clock.

use super::error::StatementError;
use super::fonts::fonts;
use chrono::Datelike;
use typst::diag::{FileError, FileResult, SourceDiagnostic};
use typst::foundations::{Bytes, Datetime, Duration, Smart};
use typst::syntax::{FileId, RootedPath, Source, VirtualPath, VirtualRoot};
use typst::text::{Font, FontBook};
use typst::utils::LazyHash;
use typst::{Feature, Features, Library, LibraryExt, World, WorldExt};
use typst_layout::PagedDocument;
use typst_pdf::{PdfOptions, PdfStandard, PdfStandards, Timestamp};

/// Everything that is the same for all letters.
pub(super) struct Desk {
    library: LazyHash<Library>,
    shared: Vec<Source>,
    standards: PdfStandards,
}

/// The identity of a file of the template set.
pub(super) fn file_id(name: &str) -> Result<FileId, StatementError> {
    let path = VirtualPath::new(name).map_err(|fault| StatementError::Template {
        template: name.to_owned(),
        line: 0,
        message: format!("the name cannot be used: {fault:?}"),
    })?;
    Ok(RootedPath::new(VirtualRoot::Project, path).intern())
}

impl Desk {
    /// A desk with these shared Typst files, by name.
    pub fn new<'a>(
        shared: impl IntoIterator<Item = (&'a str, &'a str)>,
    ) -> Result<Desk, StatementError> {
        let mut sources = vec![];
        for (name, text) in shared {
            sources.push(Source::new(file_id(name)?, text.to_owned()));
        }
        let features: Features = [Feature::A11yExtras].into_iter().collect();
        Ok(Desk {
            library: LazyHash::new(Library::builder().with_features(features).build()),
            shared: sources,
            standards: PdfStandards::new(&[PdfStandard::A_2a, PdfStandard::Ua_1])
                .expect("the two standards go together"),
        })
    }

    /// Lays out a filled template.
    ///
    /// # Errors
    /// Where the source does not parse or does not typeset.
    pub fn pages(&self, source: Source) -> Result<PagedDocument, StatementError> {
        let sheet = Sheet {
            desk: self,
            main: source,
        };
        let result = typst::compile::<PagedDocument>(&sheet);
        result.output.map_err(|faults| sheet.error(&faults))
    }

    /// Writes pages as PDF/UA-1 and PDF/A-2a. Same pages, identity and day: same bytes.
    ///
    /// # Errors
    /// Where the pages break one of the standards.
    pub fn pdf(
        &self,
        pages: &PagedDocument,
        source: Source,
        identity: &str,
        issued: chrono::NaiveDate,
    ) -> Result<Vec<u8>, StatementError> {
        let (month, day) = (issued.month() as u8, issued.day() as u8);
        let timestamp = Datetime::from_ymd_hms(issued.year(), month, day, 0, 0, 0);
        let options = PdfOptions {
            ident: Smart::Custom(identity.to_owned()),
            creator: Smart::Custom(Some("Hourworth".to_owned())),
            timestamp: timestamp.map(Timestamp::new_utc),
            page_ranges: None,
            standards: self.standards.clone(),
            tagged: true,
            pretty: false,
        };
        typst_pdf::pdf(pages, &options).map_err(|faults| {
            Sheet {
                desk: self,
                main: source,
            }
            .error(&faults)
        })
    }
}

/// One letter on the desk.
struct Sheet<'a> {
    desk: &'a Desk,
    main: Source,
}

impl Sheet<'_> {
    /// Diagnostics as messages with file and line.
    fn error(&self, faults: &[SourceDiagnostic]) -> StatementError {
        let messages = faults
            .iter()
            .map(|fault| {
                let place = fault.span.id().and_then(|id| {
                    let range = self.range(fault.span)?;
                    let source = self.source(id).ok()?;
                    let line = source.lines().byte_to_line(range.start)? + 1;
                    Some(format!("{}:{line}: ", id.vpath().get_without_slash()))
                });
                format!("{}{}", place.unwrap_or_default(), fault.message)
            })
            .collect();
        StatementError::Typesetting { messages }
    }
}

impl World for Sheet<'_> {
    fn library(&self) -> &LazyHash<Library> {
        &self.desk.library
    }

    fn book(&self) -> &LazyHash<FontBook> {
        &fonts().book
    }

    fn main(&self) -> FileId {
        self.main.id()
    }

    fn source(&self, id: FileId) -> FileResult<Source> {
        if id == self.main.id() {
            return Ok(self.main.clone());
        }
        let found = self.desk.shared.iter().find(|source| source.id() == id);
        found
            .cloned()
            .ok_or_else(|| FileError::NotFound(id.vpath().get_without_slash().into()))
    }

    fn file(&self, id: FileId) -> FileResult<Bytes> {
        self.source(id)
            .map(|source| Bytes::from_string(source.text().to_owned()))
    }

    fn font(&self, index: usize) -> Option<Font> {
        fonts().list.get(index).cloned()
    }

    fn today(&self, _offset: Option<Duration>) -> Option<Datetime> {
        None
    }
}
