import { answerAuth } from "@/lib/auth/answer-auth";

type Context = { params: Promise<{ nextauth: string[] }> };

async function handle(request: Request, { params }: Context): Promise<Response> {
  return answerAuth(request, (await params).nextauth);
}

/** Sign-in and sign-out, as next-auth names them: `csrf`, `callback/credentials`, `signout`, `session`. */
export { handle as GET, handle as POST };
