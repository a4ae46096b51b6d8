//! Interface state: (&mut Desk, Event) to effects.
