use super::*;

#[test]
fn a_header_has_two_known_names_in_any_order_and_case() {
    assert!(is_header(b"time,station\n"));
    assert!(is_header(b"\"Latitude_Deg\", colour ,STATION\r\nx"));
    assert!(!is_header(b"station;time\n"));
    assert!(!is_header(b"station,colour\n"));
    assert!(!is_header(b"03772 41480 82324\nstation,time\n"));
}

#[test]
fn fields_are_trimmed_and_unquoted() {
    let texts: Vec<Vec<u8>> =
        csv::fields(b" a ,\"b,\"\"c\"\"\",,\"d").map(|field| field.text.into_owned()).collect();
    assert_eq!(texts, [&b"a"[..], b"b,\"c\"", b"", b"d"]);
}
