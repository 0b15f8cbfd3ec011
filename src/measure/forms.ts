/**
 * The measures that the survey fills, by name, and what each of their columns means. Numbers that are unknown are NaN,
 * names that are unknown null, yes and no 1 and 0. Fractions are of 1. Counts are of cross-correlation samples.
 */
import type { MeasureForm } from "./fill-measure.ts";
import type { Column } from "./table.ts";

const column = (name: string, unit: string, meaning: string): Column => ({ name, unit, meaning });

const COUNTS: readonly Column[] = [
  column("samples", "", "all samples"),
  column("usable", "", "finite, with a weight above zero, not exactly zero"),
  column("flagged", "", "weight zero or below"),
  column("bad", "", "weight or value not finite"),
  column("zero", "", "exactly 0 + 0i with a positive weight: not a measurement"),
  column("flagged_fraction", "", "flagged, of the samples that are not exact zeros"),
  column("bad_fraction", "", "bad, of all samples"),
  column("zero_fraction", "", "exact zeros, of all samples"),
];

const LEVELS: readonly Column[] = [
  column("amplitude_median", "", "typical (median) amplitude of a sample, in the dataset's unit"),
  column(
    "noise_sigma",
    "",
    "rms of the real or imaginary part of a sample by second differences, in the dataset's unit",
  ),
  column("noise_ratio", "", "noise over the typical one of its kind"),
];

export const DATASET: MeasureForm = {
  name: "dataset",
  each: "dataset",
  title: "The dataset as a whole, one row",
  columns: [
    column("rows", "", "rows, autocorrelations left out"),
    ...COUNTS,
    column("antennas_in_table", "", "antennas in the antenna table, 0 without a table"),
    column("antennas_with_data", "", "antennas with a usable sample"),
    column("antennas_without_data", "", "antennas in the table without a usable sample"),
    column("baselines", "", "baselines met in the rows"),
    column("integrations", "", "distinct integration centres"),
    column("channels", "", "channels of a sub-band"),
    column("subbands", "", "sub-bands"),
    column("duration_s", "s", "from the first integration centre to the last"),
    column("integration_s", "s", "typical integration time"),
    column("gaps", "", "breaks in time longer than five integrations and a minute, inside one field"),
    column("largest_gap_s", "s", "longest time between neighbouring integration centres"),
    column("gap_fraction", "", "of the duration, taken by breaks longer than five integrations and a minute"),
    column("missing_integrations", "", "integrations that would fit into shorter breaks"),
    column(
      "duplicate_rows",
      "",
      "rows that repeat an earlier baseline and time; where rows are too many to keep, at least so many",
    ),
    column("duplicate_fraction", "", "of the rows"),
    column(
      "out_of_order_rows",
      "",
      "rows earlier than the row before them; in a dataset sorted by baseline, than that of the same baseline",
    ),
    column("out_of_order_fraction", "", "of the rows"),
    column("bad_time_rows", "", "rows without a time"),
    column("bad_uvw_rows", "", "rows with u, v or w not finite"),
    column("bad_uvw_fraction", "", "of the rows"),
    column(
      "sensitivity_lost",
      "",
      "1 - sqrt(usable weight over all weight, flagged and bad included), parallel hands",
    ),
    column("noise_sigma", "", "typical noise of a sample, in the dataset's unit"),
    column("amplitude_median", "", "typical amplitude of a sample, in the dataset's unit"),
    column(
      "weight_scale",
      "",
      "noise squared times weight, median of the baselines: 1 where weights are 1/sigma^2",
    ),
    column("header_faults", "", "faults noted while reading the headers and tables"),
    column("has_weights", "", "0 when the file carries no weights"),
    column("w_known", "", "1 when any w is not zero"),
    column("positions_known", "", "1 when the antenna table gives positions"),
    column(
      "autocorrelation_rows",
      "",
      "rows of an antenna with itself, which are left out of everything else",
    ),
  ],
};

export const ANTENNA: MeasureForm = {
  name: "antenna",
  each: "antenna",
  title: "Each antenna of the table or the rows",
  columns: [
    column("antenna", "", "antenna number"),
    column("name", "", "its name in the file"),
    column("in_table", "", "1 when the antenna table has it"),
    column("baselines", "", "baselines it has rows on"),
    ...COUNTS,
    column("flagged_beyond_typical", "", "flagged fraction above the median one of the antennas with rows"),
    ...LEVELS,
    column(
      "amplitude_ratio",
      "",
      "median over its baselines of the amplitude against what the other antennas make likely",
    ),
    column(
      "hand_ratio",
      "",
      "amplitude of the first parallel hand over the second, over that of the array; NaN without two",
    ),
    column(
      "coherence",
      "",
      "|vector mean| over scalar mean of neighbouring integrations, median of its baselines",
    ),
    column("coherence_ratio", "", "coherence over the median one of the antennas"),
    column(
      "weight_scatter_ratio",
      "",
      "noise times sqrt(weight), over the array's median: 1 when weights tell the noise",
    ),
  ],
};

export const BASELINE: MeasureForm = {
  name: "baseline",
  each: "baseline",
  title: "Each baseline of the rows",
  columns: [
    column("antenna1", "", "lower antenna number"),
    column("antenna2", "", "higher antenna number"),
    ...COUNTS,
    column(
      "flagged_beyond_antennas",
      "",
      "flagged fraction above that of the median baseline of either antenna, the larger",
    ),
    column("uv_min_m", "m", "shortest projected spacing"),
    column("uv_max_m", "m", "longest projected spacing"),
    column("w_max_m", "m", "largest |w|"),
    column("w_max_wavelengths", "", "the same at the highest frequency, wavelengths"),
    ...LEVELS,
    column("amplitude_scatter", "", "robust scatter of the amplitude in time over its median"),
    column(
      "amplitude_tail",
      "",
      "standard deviation of the amplitude in time over its robust scatter: 1 without outliers",
    ),
    column("coherence", "", "|vector mean| over scalar mean of neighbouring integrations"),
    column("weight_scatter_ratio", "", "noise times sqrt(weight), over the array's median"),
  ],
};

export const CHANNEL: MeasureForm = {
  name: "channel",
  each: "channel",
  title: "Each channel, all baselines and polarizations",
  columns: [
    column("subband", "", "from 0"),
    column("channel", "", "from 0"),
    column("frequency_hz", "Hz", "centre, first frequency setup"),
    ...COUNTS,
    column("flagged_beyond_typical", "", "flagged fraction above the median one of the channels"),
    ...LEVELS,
    column("amplitude_ratio", "", "amplitude over the running median of the channels around it"),
  ],
};

export const SUBBAND: MeasureForm = {
  name: "subband",
  each: "subband",
  title: "Each sub-band",
  columns: [column("subband", "", "from 0"), ...COUNTS, ...LEVELS],
};

export const POLARIZATION: MeasureForm = {
  name: "polarization",
  each: "polarization",
  title: "Each polarization product",
  columns: [
    column("polarization", "", "FITS Stokes name"),
    ...COUNTS,
    ...LEVELS,
    column("parallel", "", "1 for a parallel-hand product or Stokes I"),
    column("amplitude_ratio", "", "amplitude over the mean of the parallel hands; NaN for other products"),
    column("cross_ratio", "", "the same of the other products; NaN for the parallel hands"),
  ],
};

export const FIELD: MeasureForm = {
  name: "field",
  each: "field",
  title: "Each field with rows",
  columns: [
    column("field", "", "id in the file"),
    column("name", "", "its name in the file"),
    column("integrations", "", "integrations on it"),
    column("time_s", "s", "integrations times the typical integration time"),
    ...COUNTS,
    column("amplitude_median", "", "median of the channel-averaged scalar amplitudes, in the dataset's unit"),
  ],
};

export const SCAN: MeasureForm = {
  name: "scan",
  each: "scan",
  title: "Each scan: a run of integrations on one field without a long break",
  columns: [
    column("scan", "", "from 0"),
    column("field", "", "id in the file"),
    column("time_start", "d", "MJD (UTC)"),
    column("time_end", "d", "MJD (UTC)"),
    column("integrations", "", "integrations in it"),
    ...COUNTS,
    column("flagged_beyond_typical", "", "flagged fraction above the median one of the scans"),
    column("gap_before_s", "s", "time without any data before it; NaN for the first"),
    column("gap_in_field", "", "1 when the scan before it is of the same field, so that the break is a gap"),
  ],
};

export const INTEGRATION: MeasureForm = {
  name: "integration",
  each: "time",
  title: "Each integration of the array",
  columns: [
    column("time_start", "d", "MJD (UTC) of the centre, earliest row"),
    column("time_end", "d", "MJD (UTC) of the centre, latest row: the same but for the rounding of times"),
    column("scan", "", "from 0"),
    column("baselines", "", "rows in it"),
    ...COUNTS,
    column(
      "amplitude_median",
      "",
      "median over the baselines of the scalar amplitude over the baseline's own median",
    ),
  ],
};

export const GAP_IN_TIME: MeasureForm = {
  name: "gap_in_time",
  each: "gap",
  title: "Breaks in time of the whole array, longer than five integrations and a minute",
  columns: [
    column("time_start", "d", "MJD (UTC) of the last integration before it"),
    column("time_end", "d", "MJD (UTC) of the first integration after it"),
    column("seconds", "s", "without data"),
    column("integrations", "", "that would fit"),
    column("gap_ratio", "", "over the typical (median) gap"),
    column("field_before", "", "id of the field observed before it, null unknown"),
    column("field_after", "", "id of the field observed after it, null unknown"),
    column("in_field", "", "1 when they are the same"),
  ],
};
