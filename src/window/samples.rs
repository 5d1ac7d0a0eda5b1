//! The sample controllers, built into the program so that they are there wherever it runs.

/// Name and text of each sample, the one that the window opens on first.
pub const SAMPLES: [(&str, &str); 18] = [
    ("sump_pump", include_str!("../../projects/sump_pump.ron")),
    ("alarm_hold", include_str!("../../projects/alarm_hold.ron")),
    ("bus_wakeup", include_str!("../../projects/bus_wakeup.ron")),
    ("clock_gate", include_str!("../../projects/clock_gate.ron")),
    ("conveyor_diverter", include_str!("../../projects/conveyor_diverter.ron")),
    ("gate_drive", include_str!("../../projects/gate_drive.ron")),
    ("handshake_adapter", include_str!("../../projects/handshake_adapter.ron")),
    ("heater_interlock", include_str!("../../projects/heater_interlock.ron")),
    ("lift_door", include_str!("../../projects/lift_door.ron")),
    ("light_barrier", include_str!("../../projects/light_barrier.ron")),
    ("lock_chamber", include_str!("../../projects/lock_chamber.ron")),
    ("paired_drives", include_str!("../../projects/paired_drives.ron")),
    ("parts_washer", include_str!("../../projects/parts_washer.ron")),
    ("pump_alternator", include_str!("../../projects/pump_alternator.ron")),
    ("rail_sequencer", include_str!("../../projects/rail_sequencer.ron")),
    ("sample_mover", include_str!("../../projects/sample_mover.ron")),
    ("source_transfer", include_str!("../../projects/source_transfer.ron")),
    ("weighing_hopper", include_str!("../../projects/weighing_hopper.ron")),
];
