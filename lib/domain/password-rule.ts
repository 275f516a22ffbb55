/** Fewest characters of a password; length is what makes one hard to guess. */
export const PASSWORD_MIN = 12;

/** Long enough for the rule and yet among the first guesses; common practice, no source. Lower case, no blanks. */
const COMMON = new Set([
  "123456789012",
  "1234567890123",
  "12345678901234",
  "123456789123",
  "123123123123",
  "1q2w3e4r5t6y",
  "1qaz2wsx3edc",
  "1qaz2wsx3edc4rfv",
  "abcdefghijkl",
  "abcd1234abcd",
  "administrator",
  "administrator1",
  "adminadminadmin",
  "changemechangeme",
  "changemenow1",
  "iloveyouiloveyou",
  "letmeinletmein",
  "loadcell1234",
  "passw0rd1234",
  "password1234",
  "password12345",
  "password123456",
  "password123!",
  "passwordpassword",
  "qwerty123456",
  "qwertyqwerty",
  "qwertyuiop123",
  "qwertyuiop[]",
  "qwertzuiop123",
  "trimwright123",
  "trimwright1234",
  "trimwrighttrimwright",
  "welcome12345",
  "welcomewelcome",
]);

/**
 * What is wrong with a new password, in words that say how to mend it; undefined where nothing is.
 * @param email the person's address, which may not be the password.
 */
export function findPasswordFault(password: string, email: string): string | undefined {
  const plain = password.toLowerCase().replace(/\s/g, "");
  if ([...password].length < PASSWORD_MIN) return `Takes at least ${PASSWORD_MIN} characters; a few words will do.`;
  if (plain === email.trim().toLowerCase()) return "Takes something else than your e-mail address.";
  if (COMMON.has(plain) || new Set(plain).size < 4)
    return "This one is among the first that anybody tries; take another.";
  return undefined;
}
