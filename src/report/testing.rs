//! Published values as records, for the unit tests of this folder (sources: tests/data/published/README.md).

use crate::record::Record;

macro_rules! published {
    ($name:ident, $file:literal) => {
        pub fn $name() -> Record {
            Record::from_json(include_str!(concat!("../../tests/data/published/", $file)), $file).unwrap()
        }
    };
}

published!(konishi, "L04M02.json");
published!(konishi_ten_loops, "L04M02-ten-loops.json");
published!(six, "L06M03.json");
published!(two_orbits, "L07M02.json");
published!(pair, "L07M03.json");
published!(cubic, "L08M04.json");
