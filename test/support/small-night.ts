/** A night small enough to be checked many times: eight antennas, five minutes, a silent antenna and a line. */
export const SMALL_NIGHT = `name: small night
array:
  name: Larkfield Array
  latitude: -31.2deg
  longitude: 116.4deg
  layout: { kind: spiral, antennas: 8, inner: 60m, radius: 300m }
  diameter: 12m
time: { start: 2026-03-01T12:00:00, duration: 5min, integration: 10s }
frequency: { start: 1.4GHz, channels: 8, width: 500kHz }
fields:
  - { name: Heron, ra: 8h30m, dec: -28d30m00s }
sky:
  - { flux: 1Jy }
faults:
  - { kind: silent-antenna, antenna: 3 }
  - { kind: persistent-line, channels: "5", amplitude: 8 sigma }
`;

export const SMALL_PLAN = `field_of_view: 10arcmin
resolution: 1.8arcmin
largest_scale: 4arcmin
dynamic_range: 100
corrects_w: yes
`;
