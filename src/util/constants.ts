/** Constants of nature and of the clock. */

/** m/s, exact (SI) */
export const SPEED_OF_LIGHT = 299_792_458;
export const SECONDS_PER_DAY = 86_400;
