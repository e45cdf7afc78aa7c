/**
 * Measured reflectance files, kept in `spectra/` under the hash of their content: copied and synced before the entry that
 * names them, so that an entry never points at nothing. The same file given twice is kept once.
 */
import { refuse } from "../../engine/index.ts";
import { readNumberTable } from "../line/number-table.ts";
import type { Ports } from "../ports.ts";
import { replaceFile } from "./atomic-replace.ts";
import { sha256 } from "./canonical.ts";
import { fileRefusal, inFolder } from "./file-trouble.ts";

const FOLDER = "spectra";
/** Wavelengths a reflectometer can have, nm; outside it the column is another. */
const wavelengthNm = [150, 5000] as const;

export interface Spectrum {
  /** As the caller named it, for messages. */
  file: string;
  bytes: Uint8Array;
}

/**
 * Checks that a file is a spectrum: `wavelength_nm,reflectance` (0 to 1) or `wavelength_nm,reflectance_percent`. Returns the
 * name it is kept under. Refuses as `readNumberTable`.
 */
export function spectrumName({ file, bytes }: Spectrum): string {
  const [heading = ""] = new TextDecoder().decode(bytes).split(/\r\n|\n|\r/, 1);
  if (/reflectance_percent/i.test(heading))
    readNumberTable(bytes, file, { wavelength_nm: wavelengthNm, reflectance_percent: [0, 100] });
  else {
    const { reflectance } = readNumberTable(bytes, file, { wavelength_nm: wavelengthNm, reflectance: [0, 100] });
    const most = Math.max(...reflectance);
    if (most > 1)
      refuse("out-of-bounds", `reflectance ${most} lies above 1`, {
        file,
        hint: "per cent? Name it reflectance_percent",
      });
  }
  return `${sha256(bytes)}.csv`;
}

/** Copies a spectrum into the line folder, safe on disk on return. Refuses as `spectrumName`; `disk-full`, `read-only`, `io-error`. */
export function keepSpectrum(folder: string, ports: Ports, spectrum: Spectrum): string {
  const name = spectrumName(spectrum);
  const place = inFolder(folder, FOLDER);
  const path = inFolder(folder, `${FOLDER}/${name}`);
  if (ports.files.exists(path)) return name;
  try {
    if (!ports.files.isFolder(place)) {
      ports.files.makeFolder(place);
      ports.files.syncFolder(folder);
    }
  } catch (error) {
    throw fileRefusal(error, `make ${FOLDER}`, FOLDER);
  }
  replaceFile(ports, path, spectrum.bytes);
  return name;
}
