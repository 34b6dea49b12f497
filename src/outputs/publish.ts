/**
 * Files appear whole or not at all: each is written beside its final name, synced, and renamed when the
 * whole set is ready. The account goes last, so its presence means that the rest is whole.
 */
import { createHash } from "node:crypto";
import { closeSync, fsyncSync, mkdirSync, openSync, renameSync, rmSync, writeSync } from "node:fs";
import { join } from "node:path";

export interface PublishedFile {
  readonly file: string;
  readonly bytes: number;
  readonly sha256: string;
}

/** One file of a set while it is being written; digest and length are taken as the bytes go by. */
export class PendingFile {
  readonly name: string;
  readonly partPath: string;
  private readonly handle: number;
  private readonly digest = createHash("sha256");
  private bytes = 0;
  private open = true;

  constructor(folder: string, name: string) {
    this.name = name;
    this.partPath = join(folder, `.${name}.part`);
    this.handle = openSync(this.partPath, "w", 0o666);
  }

  write(text: string): void {
    const data = Buffer.from(text, "utf8");
    this.digest.update(data);
    for (let done = 0; done < data.length; ) done += writeSync(this.handle, data, done);
    this.bytes += data.length;
  }

  /** Syncs the bytes to the disk. */
  finish(): PublishedFile {
    fsyncSync(this.handle);
    this.close();
    return { file: this.name, bytes: this.bytes, sha256: this.digest.digest("hex") };
  }

  close(): void {
    if (this.open) closeSync(this.handle);
    this.open = false;
  }
}

/** The files of one series (or one day of it) that are published together. */
export class PublishSet {
  private readonly folder: string;
  private readonly pending: PendingFile[] = [];

  constructor(folder: string) {
    this.folder = folder;
    mkdirSync(folder, { recursive: true });
  }

  create(name: string): PendingFile {
    const file = new PendingFile(this.folder, name);
    this.pending.push(file);
    return file;
  }

  /**
   * Renames all files to their final names, in the order of creation; create the account last.
   * An older account is taken away first: while data files are being replaced it would vouch for the wrong ones.
   */
  publish(): void {
    const account = this.pending.at(-1)!;
    rmSync(join(this.folder, account.name), { force: true });
    for (const file of this.pending) {
      file.close();
      renameSync(file.partPath, join(this.folder, file.name));
    }
    syncFolder(this.folder);
  }

  /** Removes what was written so far; final names are untouched. */
  abandon(): void {
    for (const file of this.pending) {
      file.close();
      rmSync(file.partPath, { force: true });
    }
    this.pending.length = 0;
  }
}

/** Makes the renames themselves last; some file systems do not offer it, and then nothing is lost by going on. */
function syncFolder(folder: string): void {
  try {
    const handle = openSync(folder, "r");
    fsyncSync(handle);
    closeSync(handle);
  } catch {}
}
