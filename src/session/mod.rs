//! A visit: commands in, events to the log, state and views out.
