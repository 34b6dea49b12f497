/**
 * One-third octave bands with base-ten centres.
 * References: IEC 61260-1:2014, 5.2 and 5.3: octave ratio G = 10^(3/10), exact centres 1000 Hz * G^(x/3),
 * band limits G^(-1/6) and G^(+1/6) times the centre.
 */
const G = 10 ** 0.3;

export interface ThirdOctave {
  /** x: 0 is the band at 1000 Hz. */
  readonly number: number;
  readonly centre_Hz: number;
  readonly from_Hz: number;
  readonly to_Hz: number;
}

/** The bands that lie wholly between two frequencies. */
export function thirdOctaves(low_Hz: number, high_Hz: number): ThirdOctave[] {
  const bands: ThirdOctave[] = [];
  const start = Math.ceil((3 * Math.log(low_Hz / 1000)) / Math.log(G) + 0.5 - 1e-9);
  for (let x = start; ; x++) {
    const centre_Hz = 1000 * G ** (x / 3);
    const to_Hz = centre_Hz * G ** (1 / 6);
    if (to_Hz > high_Hz * (1 + 1e-12)) return bands;
    bands.push({ number: x, centre_Hz, from_Hz: centre_Hz * G ** (-1 / 6), to_Hz });
  }
}
