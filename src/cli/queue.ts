import type { Command } from 'commander';
import type { Address } from '../queue/address.ts';
import { printable } from '../scenario/text.ts';
import { InputError } from './input.ts';
import { Interrupted } from './interrupted.ts';

/**
 * Reads the address after `--queue`. What speaks to databases is loaded here and not before: other commands start without.
 * @throws InputError where it is none; it is never repeated, since it may hold a password
 */
export async function queueAddress(url: string): Promise<Address> {
  const { readAddress } = await import('../queue/address.ts');
  const read = readAddress(url);
  if ('problem' in read) throw new InputError(read.problem);
  return read.address;
}

const HELP = `
The database is any PostgreSQL from 13 on; tables are made in its schemas fieldassay and fieldassay_queue. The password
comes from PGPASSWORD or ~/.pgpass, TLS from ?sslmode=… in the address or PGSSLMODE, as with other PostgreSQL programs. A
connection pooler between must give every client a server connection of its own.

Ctrl-C once: no more cases are taken, and it ends when those that run are done. Twice, or SIGTERM: they are given back.

Example: PGPASSWORD=… fieldassay work --queue postgres://surveys@db.example/fieldassay
Example: fieldassay work --queue "postgres://surveys@db.example:5433/fieldassay?sslmode=verify-full" --threads 4
`;

/** Adds \`work\`. */
export function addWorkCommand(program: Command, threadCount: (text: string) => number, signal: AbortSignal): void {
  program
    .command('work')
    .description('take cases of surveys that were handed over with `survey --queue` on any machine, until stopped')
    .requiredOption(
      '--queue <url>',
      'required: the PostgreSQL database that surveys are handed over through, postgres://HOST/DB',
    )
    .option('--threads <n>', 'worker threads (default: all that the machine has)', threadCount)
    .addHelpText('after', HELP)
    .action(async ({ queue, threads }: { queue: string; threads?: number }) => {
      const address = await queueAddress(queue);
      const { work } = await import('../queue/work.ts');
      const leave = new AbortController();
      const give = () => leave.abort(new Interrupted('stopped'));
      // The first Ctrl-C is heard through the signal; this one was there before it or comes after.
      const onInterrupt = () => {
        if (signal.aborted) give();
      };
      process.prependListener('SIGINT', onInterrupt);
      process.on('SIGTERM', give);
      try {
        const say = (text: string) => process.stderr.write(`${printable(text)}\n`);
        const count = await work(address, { ...(threads ? { threads } : {}), stop: signal, leave: leave.signal, say });
        say(`${count} case${count === 1 ? '' : 's'} ended here`);
      } finally {
        process.off('SIGINT', onInterrupt);
        process.off('SIGTERM', give);
      }
    });
}
