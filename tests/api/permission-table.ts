/**
 * Who may call what, written by hand from the contract's "who" column (its section 7) and the rules of its section 6: decisions,
 * waivers, release, withdrawal, reinstatement, people and keys take a browser session; an auditor reads only; operators see
 * what a device carries; a key of a person reads and does an engineer's work.
 *
 * Columns as in {@link CALLERS}. `yes` allowed · `401` auth.required · `role` 403 auth.forbidden · `session` 403
 * auth.session_required.
 */
export const CALLERS = [
  "nobody",
  "engineer",
  "reviewer",
  "operator",
  "service",
  "auditor",
  "admin",
  "station key",
  "engineer's key",
  "reviewer's key",
  "admin's key",
] as const;

export type Caller = (typeof CALLERS)[number];
export type Answer = "yes" | "401" | "role" | "session";

const ROWS = `
command                        nobody eng  rev  oper serv audi admi station e.key    r.key    a.key
openapi.get                    yes    yes  yes  yes  yes  yes  yes  yes     yes      yes      yes
signing-keys.list              yes    yes  yes  yes  yes  yes  yes  yes     yes      yes      yes

families.list                  401    yes  yes  role yes  yes  yes  role    yes      yes      yes
families.get                   401    yes  yes  role yes  yes  yes  role    yes      yes      yes
families.create                401    yes  role role role role role role    yes      role     role
families.revise                401    yes  role role role role role role    yes      role     role
families.submit-revision       401    yes  role role role role role role    yes      role     role
families.take-back-revision    401    yes  role role role role role role    yes      role     role
families.decide-revision       401    role yes  role role role role role    role     session  role

layouts.lint                   401    yes  yes  role role role role role    yes      yes      role
layouts.list                   401    yes  yes  role yes  yes  yes  role    yes      yes      yes
layouts.get                    401    yes  yes  role yes  yes  yes  role    yes      yes      yes
layouts.create                 401    yes  role role role role role role    yes      role     role
layouts.save                   401    yes  role role role role role role    yes      role     role
layouts.text                   401    yes  yes  role yes  yes  yes  role    yes      yes      yes
layouts.keep-text              401    yes  role role role role role role    yes      role     role
layouts.use                    401    yes  yes  role yes  yes  yes  role    yes      yes      yes
layouts.delete                 401    yes  role role role role role role    yes      role     role
layouts.submit                 401    yes  role role role role role role    yes      role     role
layouts.take-back              401    yes  role role role role role role    yes      role     role
layouts.decide                 401    role yes  role role role role role    role     session  role
layouts.retire                 401    yes  yes  role role role role role    yes      session  role

equipment.list                 401    yes  yes  role yes  yes  yes  role    yes      yes      yes
equipment.get                  401    yes  yes  role yes  yes  yes  role    yes      yes      yes
equipment.list-runs            401    yes  yes  role yes  yes  yes  role    yes      yes      yes
equipment.add                  401    yes  role role role role role role    yes      role     role
equipment.change               401    yes  role role role role role role    yes      role     role

readingMappings.get            401    yes  yes  role yes  yes  yes  role    yes      yes      yes
readingMappings.set            401    yes  role role role role role role    yes      role     role

lots.list                      401    yes  yes  role yes  yes  yes  role    yes      yes      yes
lots.get                       401    yes  yes  role yes  yes  yes  role    yes      yes      yes
lots.list-devices              401    yes  yes  role yes  yes  yes  role    yes      yes      yes
lots.list-rewrites             401    yes  yes  role yes  yes  yes  role    yes      yes      yes
lots.list-writes               401    yes  yes  role yes  yes  yes  role    yes      yes      yes
lots.create                    401    yes  role role role role role role    yes      role     role
lots.add-devices               401    yes  role role role role role role    yes      role     role

samples.list-draws             401    yes  yes  role yes  yes  yes  role    yes      yes      yes
samples.plan                   401    yes  yes  role yes  yes  yes  role    yes      yes      yes
samples.draw                   401    yes  role role role role role role    yes      role     role

run-plans.list                 401    yes  yes  role yes  yes  yes  role    yes      yes      yes
run-plans.get                  401    yes  yes  role yes  yes  yes  role    yes      yes      yes
run-plans.template             401    yes  yes  role yes  yes  yes  role    yes      yes      yes
run-plans.add                  401    yes  role role role role role role    yes      role     role
run-plans.check                401    yes  role role role role role role    yes      role     role
run-plans.drop                 401    yes  role role role role role role    yes      role     role

runs.list                      401    yes  yes  role yes  yes  yes  role    yes      yes      yes
runs.get                       401    yes  yes  role yes  yes  yes  role    yes      yes      yes
runs.file                      401    yes  yes  role yes  yes  yes  role    yes      yes      yes
runs.readings                  401    yes  yes  role yes  yes  yes  role    yes      yes      yes
proofs.run                     401    yes  yes  role yes  yes  yes  role    yes      yes      yes
proofs.lot                     401    yes  yes  role yes  yes  yes  role    yes      yes      yes
runs.add                       401    yes  role role role role role role    yes      role     role

derivations.list               401    yes  yes  role yes  yes  yes  role    yes      yes      yes
derivations.get                401    yes  yes  role yes  yes  yes  role    yes      yes      yes
derivations.devices            401    yes  yes  role yes  yes  yes  role    yes      yes      yes
derivations.device             401    yes  yes  role yes  yes  yes  role    yes      yes      yes
derivations.packages           401    yes  yes  role yes  yes  yes  role    yes      yes      yes
derivations.compare            401    yes  yes  role yes  yes  yes  role    yes      yes      yes
derivations.findings           401    yes  yes  role yes  yes  yes  role    yes      yes      yes
derivations.add                401    yes  role role role role role role    yes      role     role
derivations.decide             401    role yes  role role role role role    role     session  role

coefficients.list              401    yes  yes  role yes  yes  yes  role    yes      yes      yes
coefficients.import            401    yes  role role role role role role    yes      role     role

packages.list                  401    yes  yes  role yes  yes  yes  role    yes      yes      yes
packages.get                   401    yes  yes  role yes  yes  yes  role    yes      yes      yes
packages.manifest              401    yes  yes  role yes  yes  yes  role    yes      yes      yes
packages.bundle                401    yes  yes  role yes  yes  yes  role    yes      yes      yes
images.list                    401    yes  yes  role yes  yes  yes  role    yes      yes      yes
images.get                     401    yes  yes  role yes  yes  yes  role    yes      yes      yes
packages.build                 401    yes  role role role role role role    yes      role     role
packages.submit                401    yes  role role role role role role    yes      role     role
packages.cancel                401    yes  role role role role role role    yes      role     role
packages.take-back             401    yes  role role role role role role    yes      role     role
packages.rebuild               401    yes  yes  role role role role role    yes      session  role
packages.waive                 401    role yes  role role role role role    role     session  role
packages.decide                401    role yes  role role role role role    role     session  role
packages.release               401    yes  yes  role role role role role    session  session  role
packages.withdraw              401    yes  yes  role role role role role    session  session  role

reinstatements.list            401    yes  yes  role yes  yes  yes  role    yes      yes      yes
reinstatements.ask             401    yes  yes  role role role role role    session  session  role
reinstatements.decide          401    role yes  role role role role role    role     session  role

compare.packages               401    yes  yes  role yes  yes  yes  role    yes      yes      yes
compare.overview               401    yes  yes  role yes  yes  yes  role    yes      yes      yes
compare.serials                401    yes  yes  role yes  yes  yes  role    yes      yes      yes
compare.export                 401    yes  yes  role yes  yes  yes  role    yes      yes      yes
compare.images                 401    yes  yes  role yes  yes  yes  role    yes      yes      yes
compare.file                   401    yes  yes  role yes  role role role    yes      yes      role
compare.layouts                401    yes  yes  role yes  yes  yes  role    yes      yes      yes

stations.list                  401    yes  yes  role yes  yes  yes  role    yes      yes      yes
stations.get                   401    yes  yes  role yes  yes  yes  role    yes      yes      yes
stations.list-writes           401    yes  yes  role yes  yes  yes  role    yes      yes      yes
stations.create                401    role role role role role yes  role    role     role     session
stations.change                401    role role role role role yes  role    role     role     session
stations.create-key            401    role role role role role yes  role    role     role     session
stations.revoke-key            401    role role role role role yes  role    role     role     session
station.live                   401    role role role role role role yes     role     role     role
station.bundle                 401    role role role role role role yes     role     role     role
station.report-writes          401    role role role role role role yes     role     role     role

devices.get                    401    yes  yes  yes  yes  yes  yes  role    yes      yes      yes
devices.record-event           401    yes  role role yes  role role role    yes      role     role
devices.check-dump             401    yes  yes  role yes  role role role    yes      yes      role
dumps.check                    401    yes  yes  role yes  role role role    yes      yes      role

trace.impact                   401    yes  yes  role yes  yes  yes  role    yes      yes      yes
ledger.list                    401    yes  yes  role yes  yes  yes  role    yes      yes      yes
ledger.list-entries            401    yes  yes  role yes  yes  yes  role    yes      yes      yes
ledger.verify                  401    yes  yes  role yes  yes  yes  role    yes      yes      yes
ledger.head                    401    yes  yes  role yes  yes  yes  role    yes      yes      yes
ledger.export                  401    yes  yes  role yes  yes  yes  role    yes      yes      yes
today.get                      401    yes  yes  yes  yes  yes  yes  role    yes      yes      yes
search                         401    yes  yes  yes  yes  yes  yes  role    yes      yes      yes

people.list                    401    yes  yes  role yes  yes  yes  role    yes      yes      yes
people.get                     401    yes  yes  role yes  yes  yes  role    yes      yes      yes
people.add                     401    role role role role role yes  role    role     role     session
people.change                  401    role role role role role yes  role    role     role     session
people.confirm-role            401    role role role role role yes  role    role     role     session
people.refuse-role             401    role role role role role yes  role    role     role     session
people.send-link               401    role role role role role yes  role    role     role     session

account.ask-for-link           yes    yes  yes  yes  yes  yes  yes  yes     yes      yes      yes
account.use-link               yes    yes  yes  yes  yes  yes  yes  yes     yes      yes      yes
account.get                    401    yes  yes  yes  yes  yes  yes  role    yes      yes      yes
account.list-keys              401    yes  yes  yes  yes  yes  yes  role    yes      yes      yes
account.list-sessions          401    yes  yes  yes  yes  yes  yes  role    yes      yes      yes
account.make-key               401    yes  yes  yes  yes  yes  yes  role    session  session  session
account.revoke-key             401    yes  yes  yes  yes  yes  yes  role    session  session  session
account.change-password        401    yes  yes  yes  yes  yes  yes  role    session  session  session
account.end-session            401    yes  yes  yes  yes  yes  yes  role    session  session  session
account.end-other-sessions     401    yes  yes  yes  yes  yes  yes  role    session  session  session
account.begin-one-time-code    401    yes  yes  yes  yes  yes  yes  role    session  session  session
account.confirm-one-time-code  401    yes  yes  yes  yes  yes  yes  role    session  session  session
account.remove-one-time-code   401    yes  yes  yes  yes  yes  yes  role    session  session  session

mail.list                      401    role role role role role yes  role    role     role     session
mail.get                       401    role role role role role yes  role    role     role     session
mail.send-again                401    role role role role role yes  role    role     role     session
`;

/** Expected answers of each command by caller. */
export const PERMISSIONS: ReadonlyMap<string, ReadonlyMap<Caller, Answer>> = new Map(
  ROWS.trim()
    .split("\n")
    .slice(1)
    .filter((line) => line !== "")
    .map((line) => {
      const [id = "", ...answers] = line.split(/\s+/);
      return [id, new Map(CALLERS.map((caller, column) => [caller, answers[column] as Answer]))];
    }),
);
