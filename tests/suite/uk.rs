//! The built-in United Kingdom pack.

use hourworth::load::{check_pack, read_pack};

#[test]
fn the_pack_has_no_fault() {
    let files = read_pack("uk", None).expect("the pack is built in");
    if let Err((sources, faults)) = check_pack(&files) {
        for fault in &faults {
            println!("{}", fault.render(&sources, false));
        }
        panic!("{} faults", faults.len());
    }
}
