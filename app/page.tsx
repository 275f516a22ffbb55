import { redirect } from "next/navigation";
import { HOME_PATH } from "@/lib/domain/local-path";

export default function Root(): never {
  redirect(HOME_PATH);
}
