//! FM 18 BUOY (METHODS COD-8).
use crate::report::Revision;
use crate::wire::calendar::Calendar;
use crate::wire::group::Groups;
use crate::wire::listener::{Listener, Outcome};

/// Reads a buoy report.
pub(crate) fn read<L: Listener>(
    mut groups: Groups<'_>,
    _: &mut Calendar,
    _: Revision,
    listener: &mut L,
) -> Outcome {
    let _ = groups.next();
    listener.complain(groups.rest(), "forms that are read", || "FM 18: not read yet".to_owned());
    Outcome::Lost
}
