//! The client letter, from hand-made assessments to PDF bytes.

#[path = "statement/invented.rs"]
mod invented;

use hourworth::statement::{TemplateSet, Typesetter, typeset};

#[test]
fn looks() {
    let Ok(folder) = std::env::var("HOURWORTH_LOOKS") else { return };
    let mut typesetter = Typesetter::new(&TemplateSet::built_in()).unwrap();
    let all: [(&str, hourworth::measures::Assessment, u8); 7] = [
        ("tenant", invented::tenant(), 12),
        ("lone", invented::lone_parent(), 12),
        ("couple", invented::couple(), 12),
        ("minimal", invented::minimal(), 12),
        ("tenant16", invented::tenant(), 16),
        ("lone20", invented::lone_parent(), 20),
        ("couple18", invented::couple(), 18),
    ];
    for (name, assessment, size) in &all {
        let mut context = invented::context();
        context.delivery.print_size = *size;
        if *name == "minimal" {
            context.delivery.address.clear();
        }
        let made = typeset(&mut typesetter, assessment, &context).unwrap_or_else(|error| panic!("{name}: {error}"));
        std::fs::write(format!("{folder}/{name}.pdf"), made.bytes).unwrap();
        println!("{name}: {} pages", made.pages);
    }
    let (assessment, context) = (invented::tenant(), invented::context());
    let mut times: Vec<_> = (0..50)
        .map(|turn| {
            let mut context = context.clone();
            context.number = format!("N-{turn}");
            let mut assessment = assessment.clone();
            assessment.facts[0].value = format!("£{turn}.00 a month");
            let begin = std::time::Instant::now();
            typeset(&mut typesetter, &assessment, &context).unwrap();
            begin.elapsed()
        })
        .collect();
    times.sort();
    println!("median of 50: {:?}", times[25]);
}

#[test]
fn bench_variants() {
    if std::env::var("HOURWORTH_BENCH").is_err() { return }
    let set = TemplateSet::built_in();
    let get = |name: &str| set.files().find(|(n, _)| *n == name).unwrap().1.to_owned();
    let page = get("shared/page.typ");
    let section = get("client/section.typ");
    let footer_start = page.find("    footer: context {").unwrap();
    let footer_end = page[footer_start..].find("    },\n  )").unwrap() + footer_start;
    let no_footer = format!("{}    footer: {{ number{}", &page[..footer_start], &page[footer_end..]);
    let variants = [
        ("all", set.clone()),
        ("no footer context", set.clone().with("shared/page.typ", no_footer.clone())),
        ("no table", set.clone().with("client/section.typ", section.replace("{%- for k in section.tables %}", "{%- for k in [] %}"))),
        ("no chart", set.clone().with("client/section.typ", section.replace("{%- if c.width %}", "{%- if 0 %}"))),
        ("no bars", set.clone().with("client/section.typ", section.replace("{%- if g.title %}", "{%- if 0 %}"))),
        ("no footer, table, chart, bars", set.clone().with("shared/page.typ", no_footer).with("client/section.typ", section.replace("{%- for k in section.tables %}", "{%- for k in [] %}").replace("{%- if c.width %}", "{%- if 0 %}").replace("{%- if g.title %}", "{%- if 0 %}"))),
    ];
    let (assessment, context) = (invented::tenant(), invented::context());
    for _ in 0..2 {
    for (name, set) in variants.iter().filter(|v| std::env::var("HOURWORTH_BENCH").is_ok_and(|w| w == "1" || w == v.0)) {
        let mut typesetter = Typesetter::new(set).unwrap();
        let mut times: Vec<_> = (0..60)
            .map(|turn| {
                let mut context = context.clone();
                context.number = format!("N-{turn}");
                let home = invented::Home { award: 900 + turn, rent: 600 + turn, ..invented::TENANT };
                let assessment = invented::assessment(&home, vec![invented::earner(&home, 0, "Ana", Some((1600, 127_100 + turn as i64 * 100)), &[])]);
                let begin = std::time::Instant::now();
                let view = hourworth::statement::letter_view(&assessment, &context).unwrap();
                let mid = begin.elapsed();
                typesetter.letter(&view, &context.texts, context.issued).unwrap();
                (begin.elapsed(), mid)
            })
            .collect();
        times.sort();
        println!("{name}: {:?} (view {:?})", times[30].0, times[30].1);
    }}
    let _ = assessment;
}
