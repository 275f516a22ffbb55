"use client";

import { useState } from "react";
import { Button } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { Select } from "@/app/_components/form/select";
import { templates, templateText } from "./templates";

interface TemplateChoiceProps {
  family: string;
  onChoose: (text: string, words: string) => void;
}

/** Shapes to begin with. */
export function TemplateChoice({ family, onChoose }: TemplateChoiceProps) {
  const [id, setId] = useState(templates[0]?.id ?? "");
  const template = templates.find((one) => one.id === id);
  return (
    <Card title="Begin with a shape" note="instead of the text below; it can be undone">
      <div className="flex flex-wrap items-end gap-3">
        <div className="w-full max-w-[380px]">
          <Select
            label="Shape"
            value={id}
            options={templates.map((one) => ({ value: one.id, name: one.name }))}
            onChange={(event) => setId(event.currentTarget.value)}
          />
        </div>
        <Button
          look="outline"
          onClick={() => template && onChoose(templateText(template, family), `“${template.name}” is taken`)}
        >
          Take this shape
        </Button>
        <p className="min-w-[220px] flex-1 pb-2 text-sm text-ink-soft">{template?.text}</p>
      </div>
    </Card>
  );
}
