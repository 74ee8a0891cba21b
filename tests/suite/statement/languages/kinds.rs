//! Payroll pages in the household's language, and file copies in English whatever that is.

use super::*;
use hourworth::batch::{rules_record, workings};
use hourworth::measures::Assessment;
use hourworth::num::{Fraction, Hours, Money};
use hourworth::statement::{CopyView, Evidence, PayView, copy_view, pay_views};

struct Printed {
    reference: String,
    assessment: Assessment,
    context: LetterContext,
    pages: Vec<PayView>,
    copy: CopyView,
    /// The copy that the household would get if its language were English.
    english: CopyView,
}

static PRINTED: LazyLock<Vec<Printed>> = LazyLock::new(|| {
    let prepared = prepare(&folder("list"), &Places::default()).expect("the list can be read");
    let mut press = press(&prepared);
    let mut books = Books::new(prepared.pack.clone(), prepared.terms.clone());
    let files = &prepared.pack_files;
    let rules = rules_record(&files.name, &files.files, &prepared.pack, &prepared.terms);
    let mut out = vec![];
    for mut household in households(&prepared) {
        let Ok(Verdict::Assessed(assessment)) = books.assess(&household) else {
            panic!("{} is not assessed", household.reference);
        };
        let points = workings(&mut books, &household, &assessment).expect("workings");
        let evidence = Evidence {
            points,
            rules: rules.clone(),
        };
        let context = press.context(&household).expect("a context").clone();
        let copy = copied(&press, &assessment, &evidence);
        let views = pay_views(&assessment, &context, &evidence, EmployerCost::LeftOut);
        household.delivery.language = "en".into();
        press.context(&household).expect("a context");
        out.push(Printed {
            reference: household.reference.clone(),
            pages: views
                .expect("pages")
                .into_iter()
                .map(|(_, page)| page)
                .collect(),
            english: copied(&press, &assessment, &evidence),
            assessment: *assessment,
            context,
            copy,
        });
    }
    out
});

fn copied(press: &Press, assessment: &Assessment, evidence: &Evidence) -> CopyView {
    copy_view(assessment, &press.office_context(), evidence).expect("a copy")
}

fn words(template: &str, view: &impl serde::Serialize, texts: &Arc<Texts>) -> Vec<String> {
    let typesetter = Typesetter::new(&TemplateSet::built_in()).expect("sound templates");
    let value = minijinja::Value::from(minijinja::value::Serde(view));
    let crowded = typesetter.crowded(template, view, texts).expect("pages");
    assert!(crowded.is_empty(), "{crowded:#?}");
    typesetter.words_of(template, &value, texts).expect("words")
}

#[test]
fn payroll_pages_are_in_the_language_of_the_household() {
    let prepared = prepare(&folder("list"), &Places::default()).expect("the list can be read");
    for one in PRINTED.iter() {
        let texts = &one.context.texts;
        assert!(!one.pages.is_empty(), "{}", one.reference);
        for page in &one.pages {
            assert_eq!(page.language, texts.language(), "{}", one.reference);
            let pages = words(Kind::Payroll.template(), page, texts);
            let found = foreign(&prepared, texts.language(), &pages);
            assert!(found.is_empty(), "{}: {found:#?}", one.reference);
            let said = dense(&pages.concat());
            for key in [
                "payslip.title",
                "payslip.row.net",
                "payslip.contract.heading",
            ] {
                let text = dense(&texts.say(key, &[]).expect("a text"));
                // Nobody here gives pay up.
                let wanted = key != "payslip.contract.heading";
                assert_eq!(said.contains(&text), wanted, "{}: {text}", one.reference);
            }
        }
    }
    let says = |reference: &str, text: &str| {
        let one = PRINTED.iter().find(|one| one.reference == reference);
        let page = &one.expect("a household").pages[0];
        let said = serde_json::to_string(page).expect("plain values");
        let said = said.replace('\u{a0}', " ");
        assert!(said.contains(text), "{reference}: {text}\n{said}");
    };
    // 16 hours at 12.71, 24.5 at 13.45: 881.23 and 1427.94 a month (52/12 weeks); the words are ours.
    says("L-01", "24.5 awr yr wythnos yn lle 16.");
    says("L-01", "Mae’r cyflog gros yn codi £546.71 y mis.");
    says("L-02", "Gross pay rises by £546.71 a month.");
    says("L-03", "El sueldo bruto sube 546,71 £ al mes.");
    says("L-04", "Der Bruttolohn steigt um 546,71 £ pro Monat.");
    // Told, and not told.
    says("L-04", "alle vier Wochen");
    says("L-08", "nicht genannt");
}

/// By hand from the pack's rules and amounts: a month is 52/12 weeks; 20% tax on pay above 900 a month.
#[test]
fn a_rise_is_split_in_the_pay_that_reaches_the_person() {
    let one = PRINTED.iter().find(|one| one.reference == "L-02");
    let offers = &one.expect("a household").assessment.earners[0].offers;
    let split = offers[0].pay.as_ref().expect("a job today and an offer");
    let weeks = Fraction::new(52, 12);
    let wage = |hundredths: i128| Fraction::new(hundredths, 100);
    // 16 hours at 12.71 are 881.23, below the allowance: all of an hour's pay reaches the person.
    assert_eq!(split.hour_before, wage(1271) * weeks);
    // 16 hours at 13.45 are 932.53, above it: four fifths do.
    assert_eq!(split.hour_after, wage(1345) * weeks * Fraction::new(4, 5));
    // 932.53 less 20% of 32.53 is 926.02 (the tax is 6.51); 926.02 less 881.23 is 44.79.
    assert_eq!(split.income, Money(44_79));
    // 15 hours at 13.45 are 874.25, too little; 15.25 are 888.82.
    assert_eq!(split.holding, Some(Hours(15_25)));
    // The tax starts at 16.34 hours on today's terms and at 15.44 on the offer's.
    assert!(!split.fragile);
}

#[test]
fn file_copies_are_in_english_in_every_language() {
    let mut others = 0;
    for one in PRINTED.iter() {
        assert_eq!(one.copy.language, "en", "{}", one.reference);
        let plain = |copy: &CopyView| serde_json::to_string(copy).expect("plain values");
        assert_eq!(plain(&one.copy), plain(&one.english), "{}", one.reference);
        let said = plain(&one.copy).replace('\u{a0}', " ");
        for text in ["Household support", "4 May 2026", "seen in its source"] {
            assert!(said.contains(text), "{}: {text}", one.reference);
        }
        let pages = words(Kind::Caseworker.template(), &one.copy, &texts("en"));
        assert!(dense(&pages.concat()).contains("SHA-256ofthepack"));
        others += usize::from(one.context.texts.language() != "en");
    }
    assert!(others >= 5, "{others} households in other languages");
}

/// A whole run of all kinds, as the command makes it.
#[test]
fn a_run_makes_all_kinds_in_every_language() {
    let prepared = prepare(&folder("list"), &Places::default()).expect("the list can be read");
    let orders = Orders {
        run_id: "20260506-TESTRUN1".into(),
        issued: chrono::NaiveDate::from_ymd_opt(2026, 5, 6).expect("a day"),
        rows: GridRows::Named,
        kinds: Kind::ALL.to_vec(),
        employer: EmployerCost::LeftOut,
    };
    let payload = hourworth::batch::setup(&prepared, &orders);
    let mut work = hourworth::batch::work(&payload).expect("a worker");
    for household in households(&prepared) {
        let product = match hourworth::batch::Assessor::assess(&mut work, &household) {
            hourworth::batch::Outcome::Printed(product) => product,
            other => panic!("{}: {other:?}", household.reference),
        };
        for kind in Kind::ALL {
            let mut files = product.statements.iter();
            let file = files.find(|file| file.kind == kind.word());
            let file = file.unwrap_or_else(|| panic!("{}: no {kind:?}", household.reference));
            let text = String::from_utf8_lossy(&file.pdf);
            let wanted = match (kind, household.delivery.language.as_str()) {
                (Kind::Caseworker, _) => "en",
                (Kind::Client | Kind::Payroll, language) => language,
            };
            let tags = [format!("/Lang({wanted})"), format!("/Lang ({wanted})")];
            assert!(
                tags.iter().any(|tag| text.contains(tag)),
                "{}, {kind:?}: not {wanted}",
                household.reference
            );
        }
    }
}
