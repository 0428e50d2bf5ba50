// How does a run get onto the disk whole, and back?

import { createHash } from 'node:crypto';
import { closeSync, existsSync, fsyncSync, mkdirSync, openSync, readFileSync, readdirSync, renameSync } from 'node:fs';
import { rmSync, statSync, writeSync } from 'node:fs';
import { hostname } from 'node:os';
import { basename, dirname, extname, join, resolve, sep } from 'node:path';

import { RunFormatError, checkRunRecord, packArrays, viewArray } from './bytes.ts';
import type { RunArray, RunRecord } from './format.ts';
import { READ_FIRST_NAME, readFirstText } from './read-first.ts';

/** The folder cannot be written or is no readable run; the message says where, what was found and what to do. */
export class RunStoreError extends Error {
  override readonly name = 'RunStoreError';
}

/** A run read from its folder. */
export interface LoadedRun {
  readonly folder: string;
  readonly record: RunRecord;
  /** All of `arrays.bin`. */
  readonly buffer: ArrayBuffer;
  /** A view on one array, by its name in `record.arrays`. Throws RunFormatError for an unknown name. */
  array(name: string): RunArray;
}

const RECORD_FILE = 'run.json';
const ARRAYS_FILE = 'arrays.bin';
/** Where files go that someone else had put into a run folder which is now written anew. */
const EARLIER_FOLDER = 'earlier';

/**
 * Writes a run folder so that a reader, a crash or Ctrl-C never meets half of one: everything goes into a hidden
 * sibling folder first, is flushed to the disk, and takes its place by renaming. A run that was there is replaced;
 * files in it that no run wrote are kept in its folder `earlier`.
 * @param folder where the run shall be; a folder that holds something else than a run is refused.
 * @param record without its table of arrays, and without `files`: both are made here.
 * @param arrays by the names that the record uses.
 * @param extraFiles name → text, for example the copy of the device file.
 * @returns the record as stored.
 */
export function writeRun(
  folder: string,
  record: Omit<RunRecord, 'arrays' | 'files'>,
  arrays: Readonly<Record<string, RunArray>>,
  extraFiles: Readonly<Record<string, string>> = {},
): RunRecord {
  const target = resolve(folder);
  refuseUnsafeTarget(target);
  const { bytes, entries } = packArrays(arrays);
  const files: Record<string, Uint8Array> = { [ARRAYS_FILE]: bytes };
  if (record.cautions.length > 0) files[READ_FIRST_NAME] = encode(readFirstText({ ...record, arrays: entries }));
  for (const [name, content] of Object.entries(extraFiles)) {
    refuseUnsafeName(name);
    files[name] = encode(content);
  }
  const stored = { ...record, arrays: entries, files: Object.fromEntries(Object.entries(files).map(describeFile)) };
  const json = JSON.stringify(stored, null, 1) + '\n';
  const checked = checkRunRecord(JSON.parse(json), bytes.byteLength);
  files[RECORD_FILE] = encode(json);

  mkdirSync(dirname(target), { recursive: true });
  cleanTemporaries(target);
  const temporary = siblingName(target, 'writing');
  try {
    mkdirSync(temporary);
    for (const [name, content] of Object.entries(files)) writeFlushed(join(temporary, name), content);
    flushFolder(temporary);
    takePlace(temporary, target, files);
  } catch (error) {
    rmSync(temporary, { recursive: true, force: true });
    throw error;
  }
  return checked;
}

/**
 * Reads a run folder and checks it: the record against the format, the arrays against their size and digest.
 * @throws RunStoreError saying what is missing, broken or too new.
 */
export function readRun(folder: string): LoadedRun {
  const target = resolve(folder);
  if (!existsSync(target)) restoreReplaced(target);
  if (!existsSync(target)) throw new RunStoreError(`${folder}: there is no such folder, expected a run folder`);
  if (!statSync(target).isDirectory()) throw new RunStoreError(`${folder}: is a file, expected a run folder`);
  const json = readPart(folder, target, RECORD_FILE).toString('utf8');
  const raw = readPart(folder, target, ARRAYS_FILE);
  // A copy of its own: Node may hand out a slice of a shared pool, whose offset need not be a multiple of 8.
  const buffer = raw.buffer.slice(raw.byteOffset, raw.byteOffset + raw.byteLength) as ArrayBuffer;
  const record = parseRecord(folder, json, buffer.byteLength);
  const noted = record.files?.[ARRAYS_FILE];
  if (noted && noted.sha256 !== digest(raw))
    throw new RunStoreError(
      `${folder}: ${ARRAYS_FILE} is damaged (${raw.byteLength} bytes, ${noted.bytes} expected; its sha256 differs): compute the run again`,
    );
  return {
    folder: target,
    record,
    buffer,
    array(name) {
      const entry = Object.hasOwn(record.arrays, name) ? record.arrays[name] : undefined;
      if (!entry) throw new RunFormatError(`arrays: came the name '${name}', expected one that the run holds`);
      return viewArray(buffer, entry, name);
    },
  };
}

/**
 * The folder a run belongs to: `base/<device>/<command>-<first 8 hex digits of the input's sha256>`.
 * @param deviceFile path of the device file; its name without ending names the device.
 * @param hashInput everything the result depends on, as one text.
 */
export function runFolder(base: string, deviceFile: string, command: string, hashInput: string): string {
  const device = basename(deviceFile, extname(deviceFile))
    .replaceAll(/[^\p{L}\p{N}._-]+/gu, '-')
    .replace(/^\.+/, '');
  return join(base, device || 'device', `${command}-${digest(encode(hashInput)).slice(0, 8)}`);
}

const encode = (text: string): Uint8Array => new TextEncoder().encode(text);
const digest = (bytes: Uint8Array): string => createHash('sha256').update(bytes).digest('hex');
const describeFile = ([name, bytes]: [string, Uint8Array]): [string, { bytes: number; sha256: string }] => [
  name,
  { bytes: bytes.byteLength, sha256: digest(bytes) },
];

function readPart(folder: string, target: string, name: string): Buffer {
  try {
    return readFileSync(join(target, name));
  } catch (error) {
    const code = (error as NodeJS.ErrnoException).code;
    const why = code === 'ENOENT' ? `has no ${name}` : `${name} cannot be read (${code ?? String(error)})`;
    throw new RunStoreError(`${folder}: ${why}, expected a run folder that holds ${RECORD_FILE} and ${ARRAYS_FILE}`);
  }
}

function parseRecord(folder: string, json: string, byteLength: number): RunRecord {
  let value: unknown;
  try {
    value = JSON.parse(json);
  } catch (error) {
    throw new RunStoreError(
      `${folder}: ${RECORD_FILE} is not valid JSON (${(error as Error).message}): compute the run again`,
    );
  }
  try {
    return checkRunRecord(value, byteLength);
  } catch (error) {
    if (error instanceof RunFormatError) throw new RunStoreError(`${folder}: ${RECORD_FILE}: ${error.message}`);
    throw error;
  }
}

function refuseUnsafeTarget(target: string): void {
  if (basename(target) === '') throw new RunStoreError(`${target}: cannot be a run folder, name one inside it`);
  if (process.cwd() === target || process.cwd().startsWith(target + sep))
    throw new RunStoreError(`${target}: is the current folder or holds it, expected a folder that can be replaced`);
  if (!existsSync(target)) return;
  if (!statSync(target).isDirectory()) throw new RunStoreError(`${target}: is a file, expected a folder`);
  if (readdirSync(target).length > 0 && !existsSync(join(target, RECORD_FILE)))
    throw new RunStoreError(
      `${target}: holds files but no run, so it is left alone; expected an empty or a new folder, or a run`,
    );
}

function refuseUnsafeName(name: string): void {
  const reserved = [RECORD_FILE, ARRAYS_FILE, READ_FIRST_NAME, EARLIER_FOLDER];
  if (name === '' || name.startsWith('.') || /[/\\\0]/.test(name) || reserved.includes(name))
    throw new RunStoreError(`file '${name}': expected a plain file name other than ${reserved.join(', ')}`);
}

/** `.NAME.writing-HOST-PID` beside the folder: the process that made it can be told. */
function siblingName(target: string, purpose: 'writing' | 'replaced'): string {
  return join(dirname(target), `.${basename(target)}.${purpose}-${ownHost()}-${process.pid}`);
}

const ownHost = (): string => hostname().replaceAll(/[^A-Za-z0-9.]/g, '_');

/** Removes what crashed processes of this host, or this process, left beside the folder. */
function cleanTemporaries(target: string): void {
  if (!existsSync(target)) restoreReplaced(target);
  for (const name of siblings(target)) {
    if (!isStale(name)) continue;
    const path = join(dirname(target), name);
    // The crash may have come before the files of others were carried over.
    if (name.includes('.replaced-') && existsSync(target)) keepForeignFiles(path, target, {});
    rmSync(path, { recursive: true });
  }
}

/** A crash between the two renamings of `takePlace` leaves the old run set aside: put it back. */
function restoreReplaced(target: string): void {
  const aside = siblings(target).find((name) => name.includes('.replaced-') && isStale(name));
  if (aside) renameSync(join(dirname(target), aside), target);
}

function siblings(target: string): string[] {
  const parent = dirname(target);
  const starts = [`.${basename(target)}.writing-`, `.${basename(target)}.replaced-`];
  if (!existsSync(parent)) return [];
  return readdirSync(parent).filter((name) => starts.some((start) => name.startsWith(start)));
}

function isStale(name: string): boolean {
  const match = /\.(?:writing|replaced)-(.+)-(\d+)$/.exec(name);
  if (!match || match[1] !== ownHost()) return false;
  const pid = Number(match[2]);
  if (pid === process.pid) return true;
  try {
    process.kill(pid, 0);
    return false;
  } catch (error) {
    return (error as NodeJS.ErrnoException).code === 'ESRCH';
  }
}

function writeFlushed(path: string, content: Uint8Array): void {
  const file = openSync(path, 'wx');
  try {
    for (let done = 0; done < content.byteLength;) done += writeSync(file, content, done);
    fsyncSync(file);
  } finally {
    closeSync(file);
  }
}

/** Makes the names in a folder durable; some systems cannot flush a folder, and need not. */
function flushFolder(path: string): void {
  try {
    const folder = openSync(path, 'r');
    try {
      fsyncSync(folder);
    } finally {
      closeSync(folder);
    }
  } catch {
    return;
  }
}

function takePlace(temporary: string, target: string, files: Readonly<Record<string, unknown>>): void {
  if (!existsSync(target)) {
    renameSync(temporary, target);
    flushFolder(dirname(target));
    return;
  }
  const aside = siblingName(target, 'replaced');
  renameSync(target, aside);
  try {
    renameSync(temporary, target);
  } catch (error) {
    renameSync(aside, target);
    throw error;
  }
  flushFolder(dirname(target));
  keepForeignFiles(aside, target, files);
  rmSync(aside, { recursive: true, force: true });
}

/** Moves what no run wrote (notes, exports) from the replaced run into `earlier` of the new one. */
function keepForeignFiles(aside: string, target: string, files: Readonly<Record<string, unknown>>): void {
  const own = new Set([RECORD_FILE, ARRAYS_FILE, READ_FIRST_NAME, ...Object.keys(files), ...namesWritten(aside)]);
  const foreign = readdirSync(aside).filter((name) => !own.has(name));
  if (foreign.length === 0) return;
  const earlier = join(target, EARLIER_FOLDER);
  mkdirSync(earlier, { recursive: true });
  const kept = foreign.includes(EARLIER_FOLDER) ? readdirSync(join(aside, EARLIER_FOLDER)) : [];
  const moves = [
    ...kept.map((name) => [join(aside, EARLIER_FOLDER, name), name]),
    ...foreign.filter((name) => name !== EARLIER_FOLDER).map((name) => [join(aside, name), name]),
  ];
  for (const [from, name] of moves) {
    rmSync(join(earlier, name), { recursive: true, force: true });
    renameSync(from, join(earlier, name));
  }
}

function namesWritten(folder: string): string[] {
  try {
    const { files } = JSON.parse(readFileSync(join(folder, RECORD_FILE), 'utf8')) as {
      files?: Record<string, unknown>;
    };
    return Object.keys(files ?? {});
  } catch {
    return [];
  }
}
