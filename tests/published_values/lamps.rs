//! Printed lists of calibration lamps: mercury, neon, argon, krypton, xenon and the iron hollow cathode.

use super::lines::compare;

#[test]
fn lamp_lists_are_met() {
    let met = compare("lamp_lists.csv", |_| 0.3);
    for (species, least) in [
        ("Hg I", 20),
        ("Ne I", 37),
        ("Ar I", 46),
        ("Kr I", 29),
        ("Xe I", 26),
        ("Fe I", 57),
    ] {
        assert!(met[species] >= least, "{species}: {met:?}");
    }
}
