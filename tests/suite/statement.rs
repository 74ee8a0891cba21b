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
