use alloc::string::ToString;

use super::{Inbound, TopicFault, Topics, check_filter, matches};
use crate::id::{Id, IdFault};

fn id(text: &str) -> Id {
    Id::new(text).unwrap()
}

fn topics() -> Topics {
    Topics::new("humward/v1", &id("north")).unwrap()
}

#[test]
fn every_inbound_topic_we_name_reads_back_as_what_it_names() {
    let t = topics();
    let (asset, point, sender) = (id("P-103A"), id("drive-end"), id("panel"));
    assert_eq!(
        t.block(&asset, &point),
        "humward/v1/north/block/P-103A/drive-end"
    );
    assert_eq!(
        t.parse_inbound(&t.block(&asset, &point)),
        Ok(Inbound::Block {
            asset: asset.clone(),
            point
        })
    );
    assert_eq!(
        t.parse_inbound(&t.speed(&asset)),
        Ok(Inbound::Speed {
            asset: asset.clone()
        })
    );
    assert_eq!(
        t.parse_inbound(&t.process(&asset)),
        Ok(Inbound::Process {
            asset: asset.clone()
        })
    );
    assert_eq!(
        t.parse_inbound(&t.command(&sender, &asset)),
        Ok(Inbound::Command { sender, asset })
    );
}

#[test]
fn a_topic_with_a_wrong_level_is_refused_with_the_level() {
    let t = topics();
    assert_eq!(
        t.parse_inbound("humward/v1/south/block/a/b"),
        Err(TopicFault::Outside {
            prefix: "humward/v1/north/".to_string()
        })
    );
    assert_eq!(
        t.parse_inbound("humward/v1/north/status/a"),
        Err(TopicFault::Kind {
            kind: "status".to_string()
        })
    );
    assert_eq!(
        t.parse_inbound("humward/v1/north/block/a"),
        Err(TopicFault::Levels {
            read: 1,
            expected: 2
        })
    );
    assert_eq!(
        t.parse_inbound("humward/v1/north/speed/a/b"),
        Err(TopicFault::Levels {
            read: 2,
            expected: 1
        })
    );
    assert_eq!(
        t.parse_inbound("humward/v1/north/block/a/"),
        Err(TopicFault::Level {
            level: 6,
            fault: IdFault::Empty
        })
    );
}

#[test]
fn a_mapped_topic_that_could_catch_our_own_words_is_found() {
    let t = topics();
    for filter in [
        "#",
        "humward/#",
        "humward/v1/north/#",
        "humward/v1/+/status/+",
        "+/+/+/+/+",
        "humward/v1/north/alarm/P-1/overall",
        "humward/v1/north/event/#",
        "humward/v1/north/status/P-1/#",
        "$share/one/humward/v1/north/reply/+/+",
    ] {
        assert!(t.is_outbound(filter), "{filter}");
    }
    for filter in [
        "plant/sensors/7/accel",
        "plant/#",
        "humward/v1/north/block/#",
        "humward/v1/south/status/P-1",
        "humward/v1/north/status",
        "humward/v1/north/status/P-1/extra",
        "+/+/+",
        "$share/one/plant/#",
    ] {
        assert!(!t.is_outbound(filter), "{filter}");
    }
}

#[test]
fn every_outbound_topic_we_name_is_known_as_outbound_and_no_inbound_one_is() {
    let t = topics();
    let (a, b) = (id("P-1"), id("x"));
    for topic in [
        t.status(&a),
        t.alarm(&a, "overall"),
        t.event(&a),
        t.event_gateway(&b),
        t.evidence(&a, "0-1"),
        t.gateway(&b),
        t.reply(&b, &a),
    ] {
        assert!(t.is_outbound(&topic), "{topic}");
        assert!(t.parse_inbound(&topic).is_err(), "{topic}");
    }
    for topic in [
        t.block(&a, &b),
        t.speed(&a),
        t.process(&a),
        t.command(&b, &a),
    ] {
        assert!(!t.is_outbound(&topic), "{topic}");
        assert!(
            t.inbound_filters().iter().any(|f| matches(f, &topic)),
            "{topic}"
        );
        assert!(
            t.asset_filters(&a).iter().any(|f| matches(f, &topic)),
            "{topic}"
        );
        assert!(
            !t.asset_filters(&b).iter().any(|f| matches(f, &topic)),
            "{topic}"
        );
    }
}

#[test]
fn a_root_that_no_broker_would_take_is_refused() {
    let site = id("north");
    assert_eq!(Topics::new("", &site), Err(TopicFault::Empty));
    assert_eq!(
        Topics::new("a//b", &site),
        Err(TopicFault::EmptyLevel { level: 2 })
    );
    assert_eq!(
        Topics::new("a/", &site),
        Err(TopicFault::EmptyLevel { level: 2 })
    );
    assert_eq!(
        Topics::new("/a", &site),
        Err(TopicFault::EmptyLevel { level: 1 })
    );
    assert_eq!(
        Topics::new("a/+", &site),
        Err(TopicFault::Character {
            character: '+',
            position: 2
        })
    );
    assert_eq!(
        Topics::new("a#", &site),
        Err(TopicFault::Character {
            character: '#',
            position: 1
        })
    );
    assert_eq!(
        Topics::new("a\0b", &site),
        Err(TopicFault::Character {
            character: '\0',
            position: 1
        })
    );
    assert_eq!(Topics::new("$SYS", &site), Err(TopicFault::Reserved));
    assert_eq!(
        Topics::new(&"r".repeat(129), &site),
        Err(TopicFault::TooLong {
            length: 129,
            allowed: 128
        })
    );
    assert!(Topics::new(&"r".repeat(128), &site).is_ok());
}

#[test]
fn a_filter_with_a_misplaced_wildcard_is_refused_with_its_place() {
    assert_eq!(check_filter("plant/+/accel/#"), Ok(()));
    assert_eq!(
        check_filter("plant/#/accel"),
        Err(TopicFault::Character {
            character: '#',
            position: 6
        })
    );
    assert_eq!(
        check_filter("plant/a+"),
        Err(TopicFault::Character {
            character: '+',
            position: 7
        })
    );
    assert_eq!(check_filter(""), Err(TopicFault::Empty));
}

#[test]
fn a_watch_with_topic_characters_cannot_reach_another_topic() {
    assert_eq!(
        topics().alarm(&id("P-1"), "a/b+#\0"),
        "humward/v1/north/alarm/P-1/a_b___"
    );
}
