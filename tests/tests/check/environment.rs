//! The environment over the files.

use humward::exit::Exit;

use crate::bench::Bench;

const SITE: &str = "site = \"harbour\"\n[broker]\nhost = \"10.0.0.1\"\n[[asset]]\nid = \"P-1\"\nspeed = 1482\npoint = [{ id = \"de\" }]\n";

fn with(variables: &[(&str, &str)]) -> crate::bench::Said {
    Bench::new(&[("site.toml", SITE)]).check("site.toml", variables)
}

#[test]
fn a_variable_replaces_the_value_of_its_key_and_adds_one_that_is_not_given() {
    let said = with(&[
        ("HUMWARD_SITE", "quay"),
        ("HUMWARD_BROKER__HOST", "broker.quay"),
        ("HUMWARD_BROKER__PORT", "1884"),
        ("HUMWARD_GATEWAY__ID", "gw-7"),
        ("HUMWARD_READING_EVERY", "30s"),
    ]);
    assert_eq!(said.exit, Exit::Fine, "{}", said.err);
    for told in [
        "site quay, gateway gw-7",
        "broker broker.quay:1884, topics under humward/v1/quay/",
        "a reading every 30 s",
    ] {
        assert!(said.out.contains(told), "{told}:\n{}", said.out);
    }
}

#[test]
fn a_variable_that_names_no_key_is_a_fault_told_by_its_name() {
    let said = with(&[
        ("HUMWARD_BROKER__HSOT", "x"),
        ("HUMWARD_BROKER_HOST", "x"),
        ("HUMWARD_ASSET__SPEED", "1"),
    ]);
    assert_eq!(said.exit, Exit::Configuration);
    assert!(
        said.err
            .contains("environment variable HUMWARD_BROKER__HSOT"),
        "{}",
        said.err
    );
    assert!(
        said.err.contains("did you mean HUMWARD_BROKER__HOST?"),
        "{}",
        said.err
    );
    assert!(
        said.err.contains("\n3 faults; ") && said.err.contains("cfg-unknown-variable"),
        "{}",
        said.err
    );
}

#[test]
fn a_variable_is_held_to_the_type_and_range_of_its_key() {
    let said = with(&[
        ("HUMWARD_BROKER__PORT", "http"),
        ("HUMWARD_GATEWAY__WORKERS", "1000"),
        ("HUMWARD_BROKER__TLS", "1"),
    ]);
    for (variable, code) in [
        (
            "HUMWARD_BROKER__PORT: broker.port\n    read:    http",
            "cfg-wrong-type",
        ),
        (
            "HUMWARD_GATEWAY__WORKERS: gateway.workers\n    read:    1000",
            "cfg-out-of-range",
        ),
        (
            "HUMWARD_BROKER__TLS: broker.tls\n    read:    1",
            "cfg-wrong-type",
        ),
    ] {
        assert!(
            said.err.contains(variable) && said.err.contains(code),
            "{variable}\n{}",
            said.err
        );
    }
}

#[test]
fn variables_of_others_and_those_that_are_no_configuration_are_left_alone() {
    let said = with(&[
        ("HUMWARD_LOG", "debug"),
        ("HUMWARD_RECORDINGS", "/r"),
        ("HUMWARDEN_SITE", "x"),
        ("PATH", "/bin"),
    ]);
    assert_eq!(said.exit, Exit::Fine, "{}", said.err);
    assert!(said.out.starts_with("site harbour,"), "{}", said.out);
}
