//! The definitions that come with the program, so that it works from any directory.

const BUILTIN: [(&str, &str); 5] = [
    ("programmable-supply", include_str!("../../../instruments/programmable-supply.toml")),
    (
        "supply-with-low-current-range",
        include_str!("../../../instruments/supply-with-low-current-range.toml"),
    ),
    ("bench-meter-current", include_str!("../../../instruments/bench-meter-current.toml")),
    ("bench-meter-voltage", include_str!("../../../instruments/bench-meter-voltage.toml")),
    ("source-measure-unit", include_str!("../../../instruments/source-measure-unit.toml")),
];

/// The text of the definition called `name`, if it comes with the program.
pub fn builtin(name: &str) -> Option<&'static str> {
    BUILTIN.iter().find(|(known, _)| *known == name).map(|(_, text)| *text)
}

/// Names of the definitions that come with the program.
pub fn builtin_names() -> impl Iterator<Item = &'static str> {
    BUILTIN.iter().map(|(name, _)| *name)
}
