import { fromBuffer, type ZipFile } from 'yauzl';

/** The files of an archive, by a reader that is not the writer. */
export function unzipped(bytes: Uint8Array): Promise<Map<string, Uint8Array>> {
  return new Promise((done, fail) => {
    fromBuffer(Buffer.from(bytes), { lazyEntries: false }, (error, zip: ZipFile) => {
      if (error) return fail(error);
      const files = new Map<string, Uint8Array>();
      zip.on('entry', (entry) =>
        zip.openReadStream(entry, async (problem, stream) => {
          if (problem) return fail(problem);
          files.set(entry.fileName, Buffer.concat(await stream.toArray()));
          if (files.size === zip.entryCount) done(files);
        }),
      );
      zip.on('error', fail);
    });
  });
}
