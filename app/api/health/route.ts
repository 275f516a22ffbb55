import { answerHealth } from "@/lib/http/health";

export const GET = answerHealth;
