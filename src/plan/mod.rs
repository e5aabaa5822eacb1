//! Which cleared check tells most per minute, and when to stop.
