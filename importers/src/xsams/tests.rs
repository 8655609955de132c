use super::*;
use crate::ReadOptions;
use crate::record::Record;
use crate::source::SourceDescription;

/// Na D2: 16973.366 cm⁻¹, 588.995 nm in air, A = 6.16e7 s⁻¹ (common practice). The transitions
/// stand before the states that they name.
const SODIUM: &str = r#"<?xml version="1.0"?>
<XSAMSData xmlns="http://vamdc.org/xml/xsams/1.0">
 <Processes><Radiative>
  <RadiativeTransition id="P1">
   <EnergyWavelength><Wavelength vacuum="false"><Value units="nm">588.995</Value></Wavelength></EnergyWavelength>
   <UpperStateRef>S2</UpperStateRef><LowerStateRef>S1</LowerStateRef>
   <Probability><TransitionProbabilityA><Value units="1/s">6.16e7</Value>
    <Accuracy relative="true" confidenceInterval="0.95">0.01</Accuracy></TransitionProbabilityA></Probability>
  </RadiativeTransition>
 </Radiative></Processes>
 <Species><Atoms><Atom>
  <ChemicalElement><NuclearCharge>11</NuclearCharge><ElementSymbol>Na</ElementSymbol></ChemicalElement>
  <Isotope><Ion speciesID="X1"><IonCharge>0</IonCharge>
   <AtomicState stateID="S1"><AtomicNumericalData><StateEnergy><Value units="1/cm">0</Value></StateEnergy></AtomicNumericalData>
    <AtomicQuantumNumbers><Parity>even</Parity><TotalAngularMomentum>0.5</TotalAngularMomentum></AtomicQuantumNumbers></AtomicState>
   <AtomicState stateID="S2"><AtomicNumericalData><StateEnergy><Value units="1/cm">16973.366</Value></StateEnergy></AtomicNumericalData>
    <AtomicQuantumNumbers><Parity>odd</Parity><TotalAngularMomentum>1.5</TotalAngularMomentum></AtomicQuantumNumbers>
    <AtomicComposition><Component><Configuration><ConfigurationLabel>2p6 3p</ConfigurationLabel></Configuration>
     <Term><LS><L><Value>1</Value></L><S>0.5</S></LS></Term></Component></AtomicComposition></AtomicState>
  </Ion></Isotope></Atom></Atoms></Species>
</XSAMSData>"#;

fn read(document: &str, records: &str) -> Result<Vec<Record>, String> {
    let toml = format!(
        "key = \"x\"\ntitle = \"t\"\ncitation = \"c\"\nkind = \"paper\"\n[[table]]\nfile = \"x.xml\"\nformat = \"xsams\"\nrecords = \"{records}\"\n"
    );
    let description = SourceDescription::parse(&toml, "source.toml").map_err(|e| e.to_string())?;
    let mut records = Vec::new();
    let bytes = document.as_bytes().to_vec();
    let mut open = |_: &str| -> std::io::Result<Box<dyn Read>> {
        Ok(Box::new(std::io::Cursor::new(bytes.clone())))
    };
    crate::read_source(
        &description,
        &mut open,
        &ReadOptions::default(),
        &mut records,
    )
    .map_err(|error| error.to_string())?;
    Ok(records)
}

#[test]
fn a_line_links_to_the_states_it_names() {
    let records = read(SODIUM, "lines").unwrap();
    let [Record::Line(line)] = records.as_slice() else {
        panic!("{records:?}")
    };
    // The wavelength is printed to 0.001 nm, 0.03 cm⁻¹.
    assert!((line.wavenumber_per_cm.unwrap() - 16_973.366).abs() < 0.03);
    assert_eq!(line.rate_per_s, Some(6.16e7));
    // 1 % at 95 %: half-width 1.96 σ.
    assert!((line.rate_relative_uncertainty.unwrap() - 0.01 / 1.96).abs() < 1e-9);
    let upper = line.upper.as_ref().unwrap();
    assert_eq!(upper.term.as_deref(), Some("2Po"));
    assert_eq!(upper.configuration.as_deref(), Some("2p6 3p"));
}

#[test]
fn states_are_levels() {
    let records = read(SODIUM, "levels").unwrap();
    assert_eq!(records.len(), 2);
}

#[test]
fn broken_documents_are_refused() {
    for (from, to, expected) in [
        ("xsams/1.0", "xsams/0.1", "no XSAMS 1.0"),
        (
            "<LowerStateRef>S1",
            "<LowerStateRef>S9",
            "no state is called `S9`",
        ),
        (
            "stateID=\"S2\"",
            "stateID=\"S1\"",
            "two states are called `S1`",
        ),
        ("16973.366", "NaN", "expected a number"),
        ("units=\"nm\"", "units=\"1/s\"", "does not fit"),
        ("units=\"nm\"", "units=\"parsec\"", "no unit"),
        (
            "<UpperStateRef>S2</UpperStateRef>",
            "",
            "does not name both",
        ),
        ("vacuum=\"false\"", "vacuum=\"maybe\"", "true or false"),
        ("</XSAMSData>", "", "ends inside"),
        (">588.995<", ">58.8995<", "no index of air|185"),
        (
            "confidenceInterval=\"0.95\"",
            "confidenceInterval=\"0.5\"",
            "is not known",
        ),
    ] {
        let found = read(&SODIUM.replace(from, to), "lines").unwrap_err();
        assert!(
            expected.split('|').any(|part| found.contains(part)),
            "{from} → {to}: {found}"
        );
    }
}
