//! Everything that a command needs before the first household, read and checked: the list, its rule pack, the office and
//! the templates. In: where they are. Out: [`Prepared`], or every fault that stands in the way.

use super::RunFolder;
use crate::case::{FactType, Household, ListSettings, ReadOptions, Schema};
use crate::diag::Diagnostic;
use crate::load::{
    CaseList, Error, Files, OfficeFile, PackFiles, Rows, Sorting, Survey, Terms, check_pack,
    lay_local, read_office, read_pack, read_templates, schema_of, terms_of,
};
use crate::rules::{ENGLISH, Local, Pack};
use crate::source::Sources;
use crate::statement::TemplateSet;
use std::path::{Path, PathBuf};

/// Where a command's inputs are.
#[derive(Clone, Copy, Debug, Default)]
pub struct Places<'a> {
    /// The pack to use in place of the list's own.
    pub rules: Option<&'a str>,
    /// A folder of templates in place of the built-in ones.
    pub templates: Option<&'a Path>,
    /// An office file.
    pub office: Option<&'a Path>,
    /// Local files beside those that the list names.
    pub local: &'a [PathBuf],
}

/// Inputs that were read and checked.
#[derive(Debug)]
pub struct Prepared {
    /// The list; its households are not read yet.
    pub list: CaseList,
    /// The pack's files.
    pub pack_files: PackFiles,
    /// The pack, checked.
    pub pack: Pack,
    /// What a list for it may hold.
    pub schema: Schema,
    /// The list's dates and changed amounts.
    pub terms: Terms,
    /// The office, where there is one.
    pub office: Option<OfficeFile>,
    /// The template set.
    pub templates: Files,
    /// What a household may ask for.
    pub options: ReadOptions,
}

/// Reads and checks a command's inputs.
///
/// # Errors
/// Where something cannot be read, and every fault of the list's settings, the pack or the terms.
pub fn prepare(list: &Path, places: &Places<'_>) -> Result<Prepared, Error> {
    let list = CaseList::open(list)?;
    let mut pack_files = match places.rules {
        Some(name) => read_pack(name, None)?,
        None => read_pack(&list.settings.pack, list.folder())?,
    };
    lay_local(
        &mut pack_files,
        &list.settings.local,
        list.folder(),
        places.local,
    )?;
    let pack = checked(&pack_files)?;
    let schema = schema_of(&pack);
    let terms = terms_of(&list.settings, &pack)
        .map_err(|faults| Error::Findings(findings(&pack.sources, &faults)))?;
    let templates = match places.templates {
        Some(folder) => read_templates(folder)?,
        None => built_in_templates(),
    };
    let office = places.office.map(read_office).transpose()?;
    if let Some(office) = &office {
        check_office(office, &schema)?;
    }
    let options = ReadOptions {
        languages: languages(&list.settings, &pack, &templates)?,
    };
    Ok(Prepared {
        list,
        pack_files,
        pack,
        schema,
        terms,
        office,
        templates,
        options,
    })
}

/// Checks a pack's files.
///
/// # Errors
/// Every fault, with the text that it stands in.
pub fn checked(files: &PackFiles) -> Result<Pack, Error> {
    check_pack(files).map_err(|(sources, faults)| Error::Findings(findings(&sources, &faults)))
}

/// Diagnostics as they are printed.
pub fn findings(sources: &Sources, faults: &[Diagnostic]) -> Vec<String> {
    faults
        .iter()
        .map(|fault| match fault.span {
            Some(_) => fault.render(sources, false),
            None => fault.line(sources),
        })
        .collect()
}

/// The templates inside the program, as files with hashes.
pub fn built_in_templates() -> Files {
    let set = TemplateSet::built_in();
    Files::of_texts(set.files())
}

/// The languages that both the templates and the pack have complete words in; that of the list first, else English.
fn languages(
    settings: &ListSettings,
    pack: &Pack,
    templates: &Files,
) -> Result<Vec<String>, Error> {
    let offered = pack.languages();
    let set = TemplateSet::new(
        templates
            .texts()
            .map(|(name, text)| (name.to_owned(), text.to_owned()))
            .collect(),
    );
    let mut all: Vec<String> = set
        .complete_languages()
        .into_iter()
        .filter(|language| offered.contains(language))
        .map(str::to_owned)
        .collect();
    all.sort_by_key(|language| (language != ENGLISH, language.clone()));
    if let Some(language) = &settings.language {
        let place = language
            .among(&all)
            .map_err(|fault| Error::Faults(vec![*fault]))?;
        let first = all.remove(place);
        all.insert(0, first);
    }
    Ok(all)
}

/// Refuses an office file that wants a fact seen which the pack does not have.
fn check_office(office: &OfficeFile, schema: &Schema) -> Result<(), Error> {
    let known: Vec<&str> = schema
        .kinds
        .iter()
        .flat_map(|kind| kind.facts.iter().map(|fact| fact.name.as_str()))
        .collect();
    let unknown: Vec<String> = office
        .office
        .hold
        .must_be_seen
        .iter()
        .filter(|wanted| !known.contains(&wanted.as_str()))
        .map(|wanted| {
            let hint = match crate::diag::nearest(wanted, known.iter().copied()) {
                Some(near) => format!("; did you mean `{near}`?"),
                None => String::new(),
            };
            format!(
                "`{}`: `must_be_seen` names `{wanted}`, expected a fact of the pack{hint}",
                office.hash.0
            )
        })
        .collect();
    if unknown.is_empty() {
        Ok(())
    } else {
        Err(Error::Findings(unknown))
    }
}

impl Prepared {
    /// The local files whose word a household has as one of its facts.
    pub fn locals_of(&self, household: &Household) -> impl Iterator<Item = &Local> {
        let has = |local: &Local| {
            let mut kinds = self.schema.kinds.iter().zip(&household.instances);
            kinds.any(|(kind, instances)| {
                kind.facts.iter().enumerate().any(|(at, fact)| {
                    let FactType::Choice(words) = &fact.ty else {
                        return false;
                    };
                    let word = words.iter().position(|word| *word == local.word);
                    local.facts.contains(&fact.name)
                        && word.is_some_and(|word| {
                            instances.iter().any(|one| one.values[at] == word as i64)
                        })
                })
            })
        };
        self.pack.locals().iter().filter(move |local| has(local))
    }

    /// Reads the whole list once. A list that is out of order is sorted: into the run's folder where there is one, else in
    /// memory.
    ///
    /// # Errors
    /// Where a table cannot be read or a copy not written.
    pub fn survey(&self, folder: Option<&RunFolder>) -> Result<(Survey, Rows), super::Error> {
        let rows = Rows::AsWritten;
        let survey = self.list.survey(&self.schema, &self.options, &rows)?;
        match survey.sorting {
            Sorting::InOrder => Ok((survey, rows)),
            Sorting::Needed => {
                let rows = match folder {
                    Some(folder) => self.list.sort_into(&folder.sorting()?)?,
                    None => self.list.sort_in_memory()?,
                };
                Ok((self.list.survey(&self.schema, &self.options, &rows)?, rows))
            }
        }
    }
}
