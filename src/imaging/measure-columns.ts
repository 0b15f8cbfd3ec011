/**
 * The measures that the forecast fills, by name, and what each of their columns means. Numbers that are unknown are
 * NaN, names that are unknown null, yes and no 1 and 0. Fractions are of 1.
 */
import type { MeasureForm } from "../measure/fill-measure.ts";
import type { Column } from "../measure/table.ts";

const column = (name: string, unit: string, meaning: string): Column => ({ name, unit, meaning });

export const IMAGE: MeasureForm = {
  name: "image",
  each: "dataset",
  title: "What the planned image would suffer, one row",
  columns: [
    column("w_known", "", "1 when w is in the file or follows from the antenna positions"),
    column("w_zeroed", "", "1 when the file's w is zero although the antenna positions give one"),
    column("w_max_wavelengths", "", "largest |w| of a usable sample, wavelengths"),
    column("w_phase_edge", "rad", "|phase| that the largest |w| leaves at the edge of the planned field"),
    column("w_loss_edge", "", "peak lost by a point source at the edge when w is not corrected"),
    column("w_shift_edge_arcsec", "arcsec", "how far that source is displaced"),
    column("w_phase_off_plane", "rad", "the same phase after the best plane of each snapshot is taken out"),
    column("uncorrected_field_arcsec", "arcsec", "full width of the field that needs no correction"),
    column("uncorrected_field_ratio", "", "planned field over the field that needs no correction"),
    column("planes", "", "w planes that a correction of the planned field needs"),
    column("facets", "", "facets that a correction of the planned field needs"),
    column("bandwidth_loss", "", "peak lost at the edge to the channel width, worst direction"),
    column("bandwidth_loss_mean", "", "the same, mean of the directions"),
    column("time_loss", "", "peak lost at the edge to the integration time, worst direction"),
    column("time_loss_mean", "", "the same, mean of the directions"),
    column("smearing_loss", "", "peak lost at the edge to both, worst direction"),
    column("filled_fraction", "", "cells of 1/field filled, between the plan's scales"),
    column("radial_gap_ratio", "", "outer over inner radius of the largest radial gap; 1 when there is none"),
    column("radial_gap_from", "", "inner radius of that gap, wavelengths"),
    column("radial_gap_to", "", "outer radius of that gap, wavelengths"),
    column(
      "azimuthal_gap_deg",
      "deg",
      "widest direction range without samples in an annulus; 0 when there is none",
    ),
    column("azimuthal_gap_from", "", "inner radius of that annulus, wavelengths"),
    column("azimuthal_gap_to", "", "outer radius of that annulus, wavelengths"),
    column("shortest_wavelengths", "", "shortest spacing of a usable sample, wavelengths"),
    column("longest_wavelengths", "", "longest spacing of a usable sample, wavelengths"),
    column("shortest_ratio", "", "shortest spacing over the one that the plan's largest scale needs"),
    column("longest_ratio", "", "longest spacing over the one that the plan's resolution needs"),
    column(
      "missing_flux",
      "",
      "flux of a Gaussian of the plan's largest scale that the shortest spacing misses",
    ),
    column("unflagged_filled_fraction", "", "filled_fraction if no sample were flagged"),
    column("unflagged_radial_gap_ratio", "", "radial_gap_ratio if no sample were flagged"),
    column("unflagged_azimuthal_gap_deg", "deg", "azimuthal_gap_deg if no sample were flagged"),
    column("unflagged_shortest_wavelengths", "", "shortest_wavelengths if no sample were flagged"),
    column("unflagged_longest_wavelengths", "", "longest_wavelengths if no sample were flagged"),
    column("beam_major_arcsec", "arcsec", "major axis of the main lobe, planned weighting"),
    column("beam_minor_arcsec", "arcsec", "minor axis of the main lobe, planned weighting"),
    column("beam_pa_deg", "deg", "position angle of the main lobe, north through east"),
    column("elongation", "", "major over minor axis"),
    column("resolution_ratio", "", "geometric mean of the axes over the planned resolution"),
    column(
      "resolution_given",
      "",
      "1 when the user gave the resolution, 0 when it was derived from the data",
    ),
    column("peak_sidelobe", "", "largest |sidelobe| inside the field, of the peak, planned weighting"),
    column("rms_sidelobe", "", "rms of the sidelobes inside the field, of the peak, planned weighting"),
    column("noise_jy", "Jy", "thermal rms of the image from the measured noise, planned weighting"),
    column("noise_factor", "", "that noise over the noise of natural weighting"),
    column("noise_ratio", "", "that noise over target_rms; NaN when none is planned"),
    column("sefd_jy", "Jy", "system equivalent flux density that the measured noise means, median"),
    column("sefd_ratio", "", "that over expected_sefd; NaN when none is given"),
    column("dynamic_range_cap", "", "peak over rms that the worst cause allows; NaN when none was found"),
    column("dynamic_range_ratio", "", "planned dynamic range over that cap; 0 when no cause was found"),
    column("limited_by", "", "the worst cause, in words"),
  ],
};

export const WEIGHTINGS: MeasureForm = {
  name: "weighting",
  each: "weighting",
  title: "Beam and noise of natural, uniform and robust weighting",
  columns: [
    column("weighting", "", "natural, uniform or robust"),
    column("robust", "", "robustness of the robust weighting; NaN for the others"),
    column("planned", "", "1 for the plan's own choice"),
    column("beam_major_arcsec", "arcsec", "major axis of the main lobe"),
    column("beam_minor_arcsec", "arcsec", "minor axis of the main lobe"),
    column("beam_pa_deg", "deg", "position angle, north through east"),
    column("elongation", "", "major over minor axis"),
    column("peak_sidelobe", "", "largest |sidelobe| inside the field, of the peak"),
    column("rms_sidelobe", "", "rms of the sidelobes inside the field, of the peak"),
    column("noise_jy", "Jy", "thermal rms of the image from the measured noise"),
    column("noise_factor", "", "that noise over the noise of natural weighting"),
  ],
};

export const BASELINE_W: MeasureForm = {
  name: "baseline_w",
  each: "baseline",
  title: "Spacing and w of each baseline, usable samples",
  columns: [
    column("antenna1", "", "antenna number"),
    column("antenna2", "", "antenna number"),
    column("uv_min_wavelengths", "", "shortest projected spacing, wavelengths"),
    column("uv_max_wavelengths", "", "longest projected spacing, wavelengths"),
    column("w_max_wavelengths", "", "largest |w|, wavelengths"),
    column("w_phase_edge", "rad", "|phase| that it leaves at the edge of the planned field"),
    column("w_loss_edge", "", "1 - <cos phase> over the baseline's samples for a source at the edge"),
    column("weight_fraction", "", "the baseline's share of the natural weight"),
    column("shadowed", "", "share of its integrations with a projected separation below the dish diameter"),
  ],
};

export const ANTENNA_W: MeasureForm = {
  name: "antenna_w",
  each: "antenna",
  title: "w by antenna: the largest of its baselines",
  columns: [
    column("antenna", "", "antenna number"),
    column("w_max_wavelengths", "", "largest |w| of its baselines, wavelengths"),
    column("w_phase_edge", "rad", "|phase| that it leaves at the edge of the planned field"),
    column("w_loss_edge", "", "1 - <cos phase> over its samples for a source at the edge"),
  ],
};

export const SNAPSHOT: MeasureForm = {
  name: "snapshot",
  each: "time",
  title: "Best-fit plane w = a u + b v of snapshots, at most 200 evenly through the times",
  columns: [
    column("time_start", "d", "MJD (UTC)"),
    column("time_end", "d", "MJD (UTC)"),
    column("plane_a", "", "a"),
    column("plane_b", "", "b"),
    column("plane_known", "", "0 when all (u, v) lie on one line, so that the plane is not determined"),
    column(
      "plane_zenith_deg",
      "deg",
      "angle from the source to the direction in which the array is coplanar",
    ),
    column("w_rms_m", "m", "rms of w"),
    column("residual_rms_m", "m", "rms of what the plane leaves of w"),
    column("residual_max_m", "m", "largest of it"),
    column("absorbed_fraction", "", "share of the rms of w that the plane takes up"),
    column("w_phase_edge", "rad", "|phase| of the largest |w| at the edge of the planned field"),
    column("residual_phase_edge", "rad", "the same for what the plane leaves"),
  ],
};

export const RADIAL_GAP: MeasureForm = {
  name: "radial_gap",
  each: "gap",
  title:
    "Ranges of spacing without samples between the plan's scales, wider than 1/field, largest ratio first",
  columns: [
    column("from_wavelengths", "", "inner radius, wavelengths"),
    column("to_wavelengths", "", "outer radius, wavelengths"),
    column("ratio", "", "outer over inner radius"),
    column(
      "kind",
      "",
      "hole (samples on both sides), short (below the shortest) or long (above the longest)",
    ),
    column("scale_from_arcsec", "arcsec", "smallest angular scale that it leaves unconstrained"),
    column("scale_to_arcsec", "arcsec", "largest angular scale that it leaves unconstrained"),
  ],
};

export const AZIMUTHAL_GAP: MeasureForm = {
  name: "azimuthal_gap",
  each: "gap",
  title:
    "Widest direction range without samples in each annulus (an octave of spacing or more) between the plan's scales",
  columns: [
    column("from_wavelengths", "", "inner radius of the annulus, wavelengths"),
    column("to_wavelengths", "", "outer radius of the annulus, wavelengths"),
    column("gap_deg", "deg", "width of the gap, of 180; 0 when no arc is longer than 1/field"),
    column("at_deg", "deg", "direction of its middle, north through east, 0 to 180"),
  ],
};

export const GEOMETRY: MeasureForm = {
  name: "geometry",
  each: "dataset",
  title: "u, v, w in the file against those from the antenna table, times and phase centre, one row",
  columns: [
    column("judged", "", "1 when the tables allow the comparison"),
    column("why_not", "", "what is missing, null when judged"),
    column(
      "relative_rms",
      "",
      "rms of the difference over the rms of |uvw|, best convention, before repairs",
    ),
    column("repaired_rms", "", "the same with the named faults taken out"),
    column("fault", "", "what is wrong, as a short word, or null: see the code's list"),
    column("fault_text", "", "the same in words with its numbers"),
    column("axis_fault", "", "flipped-u, zeroed-w, swapped-u-v ... or null"),
    column("unit_fault", "", "metres, wavelengths, nanoseconds ... when u, v, w are not seconds, or null"),
    column("scale", "", "u, v, w in the file over those expected; 1 when right"),
    column("sign_reversed", "", "1 when u, v, w are position 2 - position 1: a convention, not a fault"),
    column("rotation_deg", "deg", "turn of (u, v) against the expected, east through north"),
    column(
      "hour_angle_offset_deg",
      "deg",
      "turn about the pole that fits best; NaN when the frame leaves it free",
    ),
    column("frame", "", "frame of the antenna table that fits: geocentric, local or mirrored"),
    column("convention", "", "coordinates that fit best: catalogue or of-date"),
    column("reversed_baselines", "", "baselines stored with the antenna order the other way round"),
    column("off_antenna", "", "antenna furthest from its table position, by u, v, w; null when none is off"),
    column("off_antenna_m", "m", "by how far"),
    column("ridge_antenna", "", "antenna furthest off the plane of the others; null when unknown"),
    column("ridge_height_m", "m", "its height above (+) or below (-) that plane"),
    column(
      "coplanar_hour_angle_deg",
      "deg",
      "direction in which the array is coplanar, hour angle; NaN when unknown",
    ),
    column("coplanar_declination_deg", "deg", "and declination"),
  ],
};

export const ANTENNA_GEOMETRY: MeasureForm = {
  name: "antenna_geometry",
  each: "antenna",
  title: "Antenna positions: against the table, against the phases, and against the plane of the array",
  columns: [
    column("antenna", "", "antenna number"),
    column("offset_m", "m", "distance between the position that u, v, w mean and the table's"),
    column("offset_x_m", "m", "its components in the table's frame"),
    column("offset_y_m", "m", "its components in the table's frame"),
    column("offset_z_m", "m", "its components in the table's frame"),
    column("offset_wavelengths", "", "that distance at the highest frequency"),
    column("offset_phase_edge", "rad", "phase that it leaves at the edge of the planned field"),
    column("significance", "", "that offset over the scatter of the others'"),
    column(
      "phase_offset_m",
      "m",
      "equatorial offset that the phases of a point source mean; NaN when not measurable",
    ),
    column("phase_offset_error_m", "m", "its 1 sigma error"),
    column("height_m", "m", "height off the plane of the others, + towards the source's side"),
    column("height_wavelengths", "", "the same at the highest frequency"),
    column("height_phase_edge", "rad", "phase that it leaves at the edge of the planned field"),
  ],
};

export const BASELINE_GEOMETRY: MeasureForm = {
  name: "baseline_geometry",
  each: "baseline",
  title: "u, v, w of each baseline against those expected",
  columns: [
    column("antenna1", "", "antenna number"),
    column("antenna2", "", "antenna number"),
    column("relative_rms", "", "rms of the difference over the rms of |uvw|"),
    column("reversed", "", "1 when u, v, w have the other sign than those of the other baselines"),
  ],
};

export const LIMIT: MeasureForm = {
  name: "limit",
  each: "event",
  title: "Causes that cap the dynamic range, worst first",
  columns: [
    column("cause", "", "kind of the event, or w-term, bandwidth-smearing, time-smearing, noise"),
    column("dynamic_range", "", "peak over rms that this cause alone allows"),
    column("ratio", "", "planned dynamic range over that"),
    column("text", "", "the same in words"),
    column("event", "", "row of the measure event, from 0; NaN for a cause of the whole dataset"),
    column("antenna", "", "antenna at fault, or null"),
    column("antenna1", "", "baseline at fault, or null"),
    column("antenna2", "", "baseline at fault, or null"),
    column("time_start", "d", "MJD (UTC), or null"),
    column("time_end", "d", "MJD (UTC), or null"),
  ],
};

export const CALIBRATOR_ANTENNA: MeasureForm = {
  name: "calibrator_antenna",
  each: "antenna",
  mayBeEmpty: true,
  title:
    "Antennas against a point source at the phase centre; filled when the plan's purpose is a calibrator",
  columns: [
    column("antenna", "", "antenna number"),
    column("amplitude_ratio", "", "amplitude of its visibilities over that of most antennas'"),
    column("amplitude_error", "", "1 sigma error of the ratio"),
    column("phase_deg", "deg", "phase of its visibilities against most antennas'; 0 expected"),
    column("phase_error_deg", "deg", "1 sigma error of the phase"),
    column("dynamic_range", "", "peak over rms that its departure alone allows"),
    column("dynamic_range_ratio", "", "planned dynamic range over that"),
  ],
};

export const CALIBRATOR_BASELINE: MeasureForm = {
  name: "calibrator_baseline",
  each: "baseline",
  mayBeEmpty: true,
  title: "What the antennas leave of each baseline's departure from a point source at the phase centre",
  columns: [
    column("antenna1", "", "antenna number"),
    column("antenna2", "", "antenna number"),
    column("amplitude_ratio", "", "amplitude over that of the source and its two antennas"),
    column("amplitude_error", "", "1 sigma error of the ratio"),
    column("phase_deg", "deg", "phase that the two antennas do not explain"),
    column("phase_error_deg", "deg", "1 sigma error of the phase"),
    column("significance", "", "departure over its error, of the larger of the two"),
    column("beside", "", "that over the largest of the baselines that share an antenna with it"),
    column("allowed_error", "", "error of one baseline that the planned dynamic range allows"),
  ],
};

/** Every measure of this folder. */
export const IMAGING_MEASURES: readonly MeasureForm[] = [
  IMAGE,
  WEIGHTINGS,
  BASELINE_W,
  ANTENNA_W,
  SNAPSHOT,
  RADIAL_GAP,
  AZIMUTHAL_GAP,
  GEOMETRY,
  ANTENNA_GEOMETRY,
  BASELINE_GEOMETRY,
  LIMIT,
  CALIBRATOR_ANTENNA,
  CALIBRATOR_BASELINE,
];
