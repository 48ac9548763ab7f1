// moved to components/ui with the glass
export * from '@/components/ui/GlassPatterns'
