//! What a sound configuration resolves to.

use humward::config::{Feed, Loaded};
use humward_monitor::plan::{Measure, Persistence, Race, WatchPlan};
use humward_monitor::time::Span;

use crate::bench::{check, load};

fn site(below: &str) -> String {
    format!("site = \"harbour\"\n{below}")
}

fn watches(loaded: &Loaded) -> Vec<&WatchPlan> {
    loaded
        .groups()
        .iter()
        .flat_map(|g| g.assets())
        .flat_map(|a| &a.spec().watches)
        .collect()
}

fn names(loaded: &Loaded) -> Vec<&str> {
    watches(loaded)
        .into_iter()
        .map(WatchPlan::full_name)
        .collect()
}

const BEARING: &str =
    "bearing = { balls = 9, ball_diameter_mm = 7.94, pitch_diameter_mm = 39.04 }\n";

#[test]
fn zones_and_a_bearing_bring_their_usual_watches_and_a_switch_takes_them_away() {
    let text = |switch: &str| {
        site(&format!(
            "[[asset]]\nid = \"P-1\"\nspeed = 1482\nzones = \"pump-2-small\"\n{switch}\n[[asset.point]]\nid = \"de\"\n{BEARING}"
        ))
    };
    let loaded = load(&text(""));
    assert_eq!(
        names(&loaded),
        [
            "velocity.de",
            "outer-race.de",
            "inner-race.de",
            "rolling-element.de",
            "cage.de"
        ]
    );
    let velocity = watches(&loaded)[0].spec();
    assert_eq!(velocity.limits.alert().map(|l| l.value()), Some(5.1));
    assert_eq!(velocity.limits.danger().map(|l| l.value()), Some(8.5));
    assert!((velocity.limits.deadband() - 0.05 * 5.1).abs() < 1e-12);
    let outer = watches(&loaded)[1].spec();
    assert_eq!(outer.measure, Measure::Bearing(Race::Outer));
    assert_eq!(
        (
            outer.limits.alert().map(|l| l.value()),
            outer.limits.danger()
        ),
        (Some(20.0), None)
    );
    assert_eq!(
        (outer.at_least_ms2, outer.limits.deadband()),
        (Some(0.02), 2.0)
    );
    assert_eq!(outer.alert_after, Persistence::Time(Span::from_secs(600)));
    assert_eq!(outer.source, "common practice, no source");
    assert!(names(&load(&text("default_watches = false"))).is_empty());
}

#[test]
fn a_usual_watch_gives_way_to_a_written_one_of_its_name_or_its_measure() {
    let with = |watch: &str| {
        load(&site(&format!(
            "[[watch]]\n{watch}\nalert = 3.0\n[[asset]]\nid = \"P-1\"\nspeed = 1482\nzones = \"pump-2-small\"\npoint = [{{ id = \"de\" }}]\n"
        )))
    };
    assert_eq!(
        names(&with("name = \"velocity\"\nmeasure = \"velocity_peak\"")),
        ["velocity.de"]
    );
    assert_eq!(
        names(&with("name = \"severity\"\nmeasure = \"velocity_rms\"")),
        ["severity.de"]
    );
    assert_eq!(
        names(&with("name = \"shock\"\nmeasure = \"crest\"")),
        ["shock.de", "velocity.de"]
    );
}

#[test]
fn the_narrower_watch_of_one_name_replaces_the_wider() {
    let loaded = load(&site(
        "[[watch]]\nname = \"v\"\nmeasure = \"velocity_rms\"\nalert = 1.0\n\
         [[watch]]\nname = \"v\"\nmeasure = \"velocity_rms\"\nalert = 2.0\nassets = [\"P-2\", \"P-3\"]\n\
         [[asset]]\nid = \"P-1\"\nspeed = 1482\npoint = [{ id = \"a\" }]\n\
         [[asset]]\nid = \"P-2\"\nspeed = 1482\npoint = [{ id = \"a\" }]\n\
         [[asset]]\nid = \"P-3\"\nspeed = 1482\nwatch = [{ name = \"v\", measure = \"velocity_rms\", alert = 3.0 }]\n\
         [[asset.point]]\nid = \"a\"\n[[asset.point]]\nid = \"b\"\n\
         watch = [{ name = \"v\", measure = \"velocity_rms\", alert = 4.0 }]\n",
    ));
    let alerts: Vec<f64> = watches(&loaded)
        .iter()
        .filter_map(|w| w.spec().limits.alert())
        .map(|l| l.value())
        .collect();
    assert_eq!(alerts, [1.0, 2.0, 3.0, 4.0]);
}

#[test]
fn the_velocity_band_begins_by_the_lowest_speed() {
    for (speed, from) in [
        ("3000", 10.0),
        ("601", 10.0),
        ("600", 2.0),
        ("300", 2.0),
        ("150", 1.0),
        ("60", 0.5),
    ] {
        let loaded = load(&site(&format!(
            "[[asset]]\nid = \"P-1\"\nspeed = {speed}\npoint = [{{ id = \"de\" }}]\n"
        )));
        let point = loaded.groups()[0].assets()[0].spec().points[0]
            .spec()
            .clone();
        assert!(
            (point.velocity_from_hz - from).abs() < 1e-12,
            "{speed} r/min: {}",
            point.velocity_from_hz
        );
    }
}

#[test]
fn the_envelope_band_ends_by_the_rate() {
    for (rate, expected) in [
        ("", (2000.0, 5000.0)),
        ("rate_hz = 25600", (2000.0, 8000.0)),
        ("rate_hz = 12000", (2000.0, 4800.0)),
    ] {
        let loaded = load(&site(&format!(
            "[[asset]]\nid = \"P-1\"\nspeed = 1482\n[[asset.point]]\nid = \"de\"\n{rate}\n{BEARING}"
        )));
        assert_eq!(
            loaded.groups()[0].assets()[0].spec().points[0]
                .spec()
                .envelope_hz,
            Some(expected),
            "{rate}"
        );
    }
}

/// 9 balls of 0.3126 in on 1.537 in: outer 3.5848, inner 5.4152, cage 0.39828, element 4.7135 (documentation
/// of a bearing data set), at 1797 r/min.
#[test]
fn bearing_lines_are_told_in_hz_at_nominal_speed() {
    let said = check(&site(
        "[[asset]]\nid = \"P-1\"\nspeed = 1797\n[[asset.point]]\nid = \"de\"\nrate_hz = 12000\nframe = 16384\n\
         bearing = { balls = 9, ball_diameter_mm = 7.94004, pitch_diameter_mm = 39.0398 }\n",
    ));
    assert!(
        said.out
            .contains("outer 107.4, inner 162.2, element 141.2, cage 11.93;"),
        "{}\n{}",
        said.out,
        said.err
    );
    assert!(
        said.out
            .contains("16384: 1.365 s, spectral lines 0.7324 Hz apart"),
        "{}",
        said.out
    );
    assert!(
        said.out
            .contains("low band: every 4th sample, 3000 samples/s"),
        "{}",
        said.out
    );
}

#[test]
fn a_usual_watch_that_cannot_be_resolved_is_left_out_and_told() {
    let text = site(&format!(
        "[[asset]]\nid = \"P-1\"\nspeed = 1482\n[[asset.point]]\nid = \"de\"\nrate_hz = 12000\n{BEARING}"
    ));
    let loaded = load(&text);
    assert_eq!(
        names(&loaded),
        ["outer-race.de", "inner-race.de", "rolling-element.de"]
    );
    assert_eq!(loaded.notes().len(), 1);
    assert!(
        check(&text)
            .out
            .contains("P-1/de: cage is not watched: cage line at 9.84 Hz"),
        "{}",
        check(&text).out
    );
}

#[test]
fn a_zone_class_of_the_site_replaces_the_shipped_one() {
    let loaded = load(&site(
        "[[zone_table]]\nsource = \"ours\"\nclass = [{ id = \"pump-2-small\", borders = [1, 2, 3] }]\n\
         [[asset]]\nid = \"P-1\"\nspeed = 1482\nzones = \"pump-2-small\"\npoint = [{ id = \"de\" }]\n",
    ));
    let zones = loaded.groups()[0].assets()[0].spec().zones.clone().unwrap();
    assert_eq!((zones.source(), zones.borders()), ("ours", [1.0, 2.0, 3.0]));
}

#[test]
fn topics_are_ours_unless_mapped_and_no_two_feeds_share_one() {
    let loaded = load(&site(
        "[[asset]]\nid = \"P-1\"\nspeed = 1482\nspeed_topic = \"plant/tacho\"\n\
         [[asset.point]]\nid = \"x\"\nsource = \"box\"\nchannel = 0\ntopic = \"plant/box\"\n\
         [[asset.point]]\nid = \"y\"\nsource = \"box\"\nchannel = 1\n\
         [[asset.point]]\nid = \"z\"\n",
    ));
    let topics: Vec<&str> = loaded.routes().iter().map(|route| route.topic()).collect();
    assert_eq!(
        topics,
        [
            "plant/box",
            "humward/v1/harbour/block/P-1/z",
            "plant/tacho",
            "humward/v1/harbour/process/P-1"
        ]
    );
    assert!(
        matches!(loaded.route("plant/box").unwrap().feed(), Feed::Block { source, .. } if source.as_str() == "box")
    );
    let said = check(&site(
        "[[asset]]\nid = \"P-1\"\nspeed = 1482\n\
         [[asset.point]]\nid = \"x\"\ntopic = \"plant/box\"\n[[asset.point]]\nid = \"y\"\ntopic = \"plant/box\"\n",
    ));
    assert!(
        said.err.contains("site.toml:10:9: asset.P-1.point.y.topic")
            && said.err.contains("cfg-twice"),
        "{}",
        said.err
    );
}

#[test]
fn assets_of_one_group_make_one_plan() {
    let loaded = load(&site(
        "[[asset]]\nid = \"P-1\"\ngroup = \"slab\"\nspeed = 1482\npoint = [{ id = \"de\" }]\n\
         [[asset]]\nid = \"P-2\"\nspeed = 1482\npoint = [{ id = \"de\" }]\n\
         [[asset]]\nid = \"P-3\"\ngroup = \"slab\"\nspeed = 1482\npoint = [{ id = \"de\" }]\n",
    ));
    let groups: Vec<(&str, usize)> = loaded
        .groups()
        .iter()
        .map(|g| (g.id().as_str(), g.assets().len()))
        .collect();
    assert_eq!(groups, [("slab", 2), ("P-2", 1)]);
}
