//! Nothing that is typed into a case can become markup or code.

use chrono::NaiveDate;
use hourworth::statement::{StatementError, TemplateSet, Texts, Typesetter};
use minijinja::{Value, context};
use proptest::prelude::*;
use std::collections::BTreeMap;
use std::sync::Arc;

fn texts() -> Arc<Texts> {
    let text = "hello = \"Good day, {name}.\"\n";
    Arc::new(Texts::read("en", text).expect("the text is sound"))
}

fn set(template: &str) -> TemplateSet {
    TemplateSet::new(BTreeMap::new()).with("probe.typ", template)
}

fn words(template: &str, view: &Value) -> Result<String, StatementError> {
    let typesetter = Typesetter::new(&set(template))?;
    Ok(typesetter.words_of("probe.typ", view, &texts())?.join(" "))
}

/// Without spaces: a line may break anywhere.
fn dense(text: &str) -> String {
    text.chars()
        .filter(|character| !character.is_whitespace())
        .collect()
}

const PAGE: &str = "#set text(font: \"Noto Sans\")\n";
/// A value that would stop the typesetter if it were read as markup or code.
const ATTACK: &str = "\"; #panic(\"run\") ] } ) */ ` $ #panic(\"run\")";

#[test]
fn a_value_shows_as_typed() {
    let t = |text: &str| {
        let shown = words(&format!("{PAGE}[{{{{ x }}}}]."), &context! { x => text }).expect(text);
        assert_eq!(dense(&shown), dense(&format!("[{text}].")), "{text}");
    };
    t(ATTACK);
    t("= Heading");
    t("- point + point / term: x");
    t("*bold* _slanted_ `raw` $x$ @label <label> #let x = 1");
    t("https://example.org/a?b=c#d");
    t("\\u{41} \\n \\ \"quoted\" 'single' -- --- ...");
    t("{{ x }} {% if %} {# #}");
    t("O’Neill & Søn, Łódź, Ångström, £5, 3½, €7");
    t("// comment /* comment */");
    t("~ tied");
    t("");
}

#[test]
fn a_value_after_a_value_stays_text() {
    let shown = words(
        &format!("{PAGE}{{{{ a }}}}(1).len(){{{{ b }}}}[x].y {{{{ a }}}}.upper"),
        &context! { a => "first", b => "second" },
    )
    .expect("both are text");
    assert_eq!(dense(&shown), "first(1).len()second[x].yfirst.upper");
}

#[test]
fn a_value_between_other_signs_stays_text() {
    let t = |before: &str, after: &str| {
        let shown = words(
            &format!("{PAGE}{before}{{{{ x }}}}{after}"),
            &context! { x => ATTACK },
        );
        assert_eq!(
            dense(&shown.expect("text")),
            dense(&format!("{before}{ATTACK}{after}"))
        );
    };
    t("a <", ">");
    t("a (", ")");
}

#[test]
fn a_value_where_no_text_can_stand_is_refused() {
    let t = |template: &str| {
        for value in [
            ATTACK,
            "x",
            ", fill: red",
            "1",
            "*/ x /*",
            "` x `",
            "\n#panic()\n",
            "",
        ] {
            let result = words(template, &context! { x => value });
            assert!(
                matches!(
                    result,
                    Err(StatementError::Template { .. } | StatementError::Typesetting { .. })
                ),
                "{template} with {value}: {result:?}"
            );
        }
    };
    t("#text(size: {{ x }})[a]");
    t("#let a = {{ x }}");
    t("#{ {{ x }} }");
    t("#text(\"{{ x }}\")");
    t("#let a = \"b {{ x }} c\"");
    t("// {{ x }}");
    t("/* {{ x }} */");
    t("`{{ x }}`");
    t("```\n{{ x }}\n```");
    t("https://{{ x }}");
    t("#import \"{{ x }}\"");
    t("\\{{ x }}");
}

#[test]
fn nothing_inserts_unescaped() {
    // No filter exists, so none can mark a value as safe.
    for filter in ["safe", "escape", "e", "string", "upper", "tojson", "join"] {
        let result = words(&format!("{{{{ x | {filter} }}}}"), &context! { x => "a" });
        assert!(
            matches!(&result, Err(StatementError::Template { line: 1, .. })),
            "{filter}: {result:?}"
        );
    }
    // Switching escaping off has no effect; captured output and macros are inserted as text like anything else.
    let t = |template: &str, expected: &str| {
        let shown = words(&format!("{PAGE}{template}"), &context! { x => ATTACK }).expect(template);
        assert_eq!(dense(&shown), dense(expected), "{template}");
    };
    t("{% autoescape false %}{{ x }}{% endautoescape %}", ATTACK);
    t(
        "{% autoescape \"html\" %}{{ x }}{% endautoescape %}",
        ATTACK,
    );
    t("{% set y %}{{ \"a\" }}{% endset %}{{ y }}", "#\"a\";");
    t("{% macro m() %}#panic(){% endmacro %}{{ m() }}", "#panic()");
    t("{% set y = x ~ \"!\" %}{{ y }}", &format!("{ATTACK}!"));
    t(
        "{{ t(\"hello\", name=x) }}",
        &format!("Good day, {ATTACK}."),
    );
    // A value that says it is safe is escaped all the same.
    let safe = context! { x => Value::from_safe_string(ATTACK.to_owned()) };
    let shown = words(&format!("{PAGE}{{{{ x }}}}"), &safe).expect("escaped");
    assert_eq!(dense(&shown), dense(ATTACK));
}

#[test]
fn numbers_print_as_numbers_and_nothing_else_does() {
    let shown = words(
        &format!("{PAGE}#let a = {{{{ n }}}} * 2\n#a"),
        &context! { n => 21 },
    )
    .expect("a number is code");
    assert_eq!(dense(&shown), "42");
    for value in [
        Value::from(1.5),
        Value::from(f64::NAN),
        Value::from(true),
        Value::from(()),
        Value::from(vec![1, 2]),
        Value::from_pairs([("a", 1)]),
    ] {
        let result = words("{{ n }}", &context! { n => value });
        assert!(
            matches!(&result, Err(StatementError::Template { line: 1, .. })),
            "{result:?}"
        );
    }
}

#[test]
fn an_undefined_name_names_template_and_line() {
    let t = |template: &str, wanted: usize| match words(
        template,
        &context! { a => context! { b => 1 } },
    ) {
        Err(StatementError::Template {
            template,
            line,
            message,
        }) => {
            assert_eq!(
                (template.as_str(), line),
                ("probe.typ", wanted),
                "{message}"
            );
        }
        other => panic!("{template}: {other:?}"),
    };
    t("one\n\n{{ missing }}", 3);
    t("one\n{{ a.missing }}", 2);
    t("{% for x in missing %}{% endfor %}", 1);
    t("\n\n\n{% if missing %}{% endif %}", 4);
    t("{{ t(\"no.such.key\") }}", 1);
    t("\n{{ t(\"hello\") }}", 2);
    t("\n{{ missing() }}", 2);
}

#[test]
fn a_template_cannot_run_for_ever() {
    let view = context! { many => (0..10_000).collect::<Vec<_>>() };
    let endless = "{% for a in many %}{% for b in many %}{{ b }}{% endfor %}{% endfor %}";
    assert!(matches!(
        words(endless, &view),
        Err(StatementError::Template { .. })
    ));
    let itself = set("{% include \"probe.typ\" %}");
    let typesetter = Typesetter::new(&itself).expect("it parses");
    assert!(matches!(
        typesetter.words_of("probe.typ", &context! {}, &texts()),
        Err(StatementError::Template { .. })
    ));
}

#[test]
fn nothing_outside_the_set_is_read() {
    for reach in [
        "#read(\"/etc/hostname\")",
        "#read(\"../../Cargo.toml\")",
        "#image(\"mark.png\", alt: \"x\")",
        "#import \"@preview/example:0.1.0\": add",
        "#datetime.today().display()",
    ] {
        let result = words(reach, &context! {});
        assert!(
            matches!(result, Err(StatementError::Typesetting { .. })),
            "{reach}: {result:?}"
        );
    }
}

#[test]
fn a_character_without_a_glyph_is_named_with_its_field() {
    let t = |text: &str, character: char| {
        let view = context! { address => vec!["Ana".to_owned(), text.to_owned()] };
        let fault = words("{{ address[0] }}", &view);
        let wanted = StatementError::Glyph {
            field: "address[1]".to_owned(),
            character,
        };
        assert_eq!(fault, Err(wanted));
    };
    t("سلام", 'س');
    t("家", '家');
    t("a\u{0007}b", '\u{0007}');
    t("a\tb", '\t');
    t("a\u{202e}b", '\u{202e}');
    t("a\u{200b}b", '\u{200b}');
    t("\u{e000}", '\u{e000}');
    t("😀", '😀');
    let message = StatementError::Glyph {
        field: "address[1]".to_owned(),
        character: '家',
    }
    .to_string();
    assert_eq!(
        message,
        "`address[1]` has the character `家`, found U+5BB6, which the shipped fonts cannot set"
    );
}

#[test]
fn a_text_with_a_fault_is_refused() {
    let t = |text: &str, part: &str| {
        let fault = Texts::read("en", text).expect_err(text).to_string();
        assert!(fault.contains(part), "{fault}");
    };
    t("a = \"{open\"", "without its pair");
    t("a = \"shut}\"", "without its pair");
    t("a = 1", "expected a text");
    t("a = \"家\"", "U+5BB6");
    t("a = ", "");
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 300, ..ProptestConfig::default() })]

    /// Whatever can be typed is read back by the Typst parser as exactly that string, once.
    #[test]
    fn every_value_is_one_string_literal(text in "\\PC{0,40}", signs in "[\\\\\"#*_`$<>@\\[\\]{}()/~.=+ -]{0,20}") {
        let value = format!("{signs}{text}{signs}");
        let typed = set("A {{ x }} B");
        let typesetter = Typesetter::new(&typed).expect("it parses");
        match typesetter.source_of("probe.typ", &context! { x => value.as_str() }, &texts()) {
            Err(StatementError::Glyph { .. }) => {}
            Err(other) => return Err(TestCaseError::fail(other.to_string())),
            Ok(source) => {
                let root = typst::syntax::parse(&source);
                prop_assert!(root.errors_and_warnings().0.is_empty());
                let mut found = vec![];
                strings(&root, &mut found);
                prop_assert_eq!(found, vec![value]);
            }
        }
    }

    /// What the fonts can set is set as typed.
    #[test]
    fn every_plain_value_shows_as_typed(text in "[ -~£€’–ÀàÉéŁłØøßñ½]{0,60}") {
        let shown = words(&format!("{PAGE}|{{{{ x }}}}|"), &context! { x => text.as_str() });
        let shown = shown.map_err(|error| TestCaseError::fail(error.to_string()))?;
        prop_assert_eq!(dense(&shown), dense(&format!("|{text}|")));
    }
}

/// All string literals of a syntax tree.
fn strings(node: &typst::syntax::SyntaxNode, out: &mut Vec<String>) {
    if let Some(text) = node.cast::<typst::syntax::ast::Str>() {
        out.push(text.get().to_string());
    }
    for child in node.children() {
        strings(child, out);
    }
}

#[test]
fn a_standard_is_checked_when_bytes_are_made() {
    // PDF/UA-1 wants a title: the same words without one are refused, with one they are made.
    let day = NaiveDate::from_ymd_opt(2026, 6, 4).expect("a day");
    let body = "#set text(font: \"Noto Sans\", lang: \"en\")\n= Head\nWords.";
    let mut without = Typesetter::new(&set(body)).expect("it parses");
    let nothing: BTreeMap<String, String> = BTreeMap::new();
    let result = without.any("probe.typ", &nothing, &texts(), "n", day);
    assert!(
        matches!(result, Err(StatementError::Typesetting { .. })),
        "{result:?}"
    );
    let mut with =
        Typesetter::new(&set(&format!("#set document(title: [T])\n{body}"))).expect("it parses");
    let made = with
        .any("probe.typ", &nothing, &texts(), "n", day)
        .expect("a title is there");
    let text = String::from_utf8_lossy(&made.bytes).into_owned();
    assert!(text.contains("pdfuaid"), "PDF/UA-1 is claimed");
    assert!(text.contains("pdfaid"), "PDF/A-2a is claimed");
}
